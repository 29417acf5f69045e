"""What the formulations say at (temperature, pressure): viscosity, density, and the group G of the thermal term.

Density is p M / (R T Z) with the present gas constant R = 8.31446261815324 J/(mol K) and the formulation's own
Z = p / (rho R' T). The equations of state were published with older constants R' (up to 15 ppm lower, for oxygen);
taking their Z rather than their density keeps the dilute gas exactly ideal.
"""

import CoolProp.CoolProp as CP

import noble

R = 8.31446261815324
VANISHING = 1e-7  # mol/m3, where a formulation is evaluated for its dilute-gas limit


class Formulation:
    """One fluid of the property library, its phase stated so that no two-phase search runs."""

    def __init__(self, library_name, phase):
        self.name, self.phase = library_name, phase
        self.state = CP.AbstractState("HEOS", library_name)
        self.state.specify_phase(CP.iphase_gas if phase == "gas" else CP.iphase_liquid)
        self.molar_mass = self.state.molar_mass()

    def at(self, temperature, pressure):
        """(viscosity, density) in Pa s and kg/m3, unscaled."""
        self.state.update(CP.PT_INPUTS, pressure, temperature)
        return self._viscosity(temperature), self._density(temperature, pressure)

    def dilute_viscosity(self, temperature):
        """The limit of the viscosity at zero pressure; gases only."""
        if self.name == "Krypton":
            return noble.krypton(None, temperature, 0.0)
        if self.name == "Xenon":
            return noble.xenon(temperature, 0.0)
        if self.name == "Neon":
            return noble.neon(temperature, 0.0)
        self.state.update(CP.DmolarT_INPUTS, VANISHING, temperature)
        return self.state.viscosity()

    def thermal_group(self, temperature, pressure=101325.0):
        """(1 + n/3) mu (R/M) / k, n = dln mu / dln T; the monatomic gases without a conductivity use k = 15/4 (R/M) mu."""
        step = 0.25
        low, high = (self.at(temperature + d, pressure)[0] for d in (-step, step))
        viscosity = self.at(temperature, pressure)[0]
        exponent = temperature * (high - low) / (2.0 * step * viscosity)
        if self.name in ("Krypton", "Xenon", "Neon"):
            ratio = 4.0 / 15.0
        else:
            ratio = viscosity * R / self.molar_mass / self.state.conductivity()
        return (1.0 + exponent / 3.0) * ratio

    def saturation_pressure(self, temperature):
        """Pa, or None above the critical temperature."""
        if temperature >= self.state.T_critical():
            return None
        return CP.PropsSI("P", "T", temperature, "Q", 1, self.name)

    def _viscosity(self, temperature):
        if self.name == "Krypton":
            return noble.krypton(self.state, temperature, self.state.rhomolar())
        if self.name == "Xenon":
            return noble.xenon(temperature, self.state.rhomolar())
        if self.name == "Neon":
            return noble.neon(temperature, self.state.rhomolar())
        return self.state.viscosity()

    def _density(self, temperature, pressure):
        if self.phase == "liquid":
            return self.state.rhomass()
        z = pressure / (self.state.rhomolar() * self.state.gas_constant() * temperature)
        return pressure * self.molar_mass / (R * temperature * z)
