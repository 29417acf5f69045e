"""From a fluid's formulation to its rounded curves, and the measured worst error of those curves."""

import math
from dataclasses import dataclass

import numpy as np

import fit
from states import R, Formulation


@dataclass
class Table:
    fluid: object
    molar_mass: float
    scale: float
    viscosity: np.ndarray  # [y0, m0, y1, m1, ...]
    viscosity_pressure: list
    density_pressure: list
    extra: np.ndarray
    formulation: Formulation
    residual_viscosity: float = 0.0
    residual_density: float = 0.0

    def evaluate(self, temperature, pressure):
        """(viscosity, density) of the rounded table, in double precision."""
        box = self.fluid.box
        viscosity = fit.hermite(fit.FINE, box, temperature) @ self.viscosity
        if self.fluid.phase == "liquid":
            viscosity = fit.LIQUID_SCALE * np.exp(viscosity)
        viscosity = viscosity * fit.polynomial(self.viscosity_pressure, box, temperature, pressure)
        factor = fit.polynomial(self.density_pressure, box, temperature, pressure)
        if self.fluid.phase == "liquid":
            return viscosity, (fit.hermite(fit.COARSE, box, temperature) @ self.extra) * factor
        return viscosity, pressure * self.molar_mass / (R * temperature * factor)

    def truth(self, temperature, pressure):
        """(viscosity, density) of the formulation, the viscosity scaled."""
        pairs = np.array([self.formulation.at(t, p) for t, p in zip(temperature, pressure)])
        return pairs[:, 0] * self.scale, pairs[:, 1]


def grid(temperatures, pressures):
    t, p = np.meshgrid(temperatures, pressures, indexing="ij")
    return t.ravel(), p.ravel()


def chebyshev(low, high, count):
    return (low + high) / 2 - (high - low) / 2 * np.cos(np.linspace(0.0, np.pi, count))


def build(fluid):
    """Fits all curves of one fluid and measures what they miss."""
    formulation = Formulation(fluid.library, fluid.phase)
    check_single_phase(fluid, formulation)
    scale = 1.0
    if fluid.recommended:
        scale = float(fit.single(fluid.recommended / formulation.dilute_viscosity(298.15)))
    table = Table(fluid, float(fit.single(formulation.molar_mass)), scale, None, [], [], None, formulation)
    (_fit_gas if fluid.phase == "gas" else _fit_liquid)(table)
    _measure(table)
    return table


def check_single_phase(fluid, formulation):
    """The whole box must stay below 0.9 of the saturation pressure for a gas, above 1.05 of it for a liquid."""
    saturation = formulation.saturation_pressure(fluid.box[0] if fluid.phase == "gas" else fluid.box[1])
    if saturation is not None:
        margin = fluid.pascals[1] / saturation if fluid.phase == "gas" else saturation / fluid.pascals[0]
        assert margin < (0.9 if fluid.phase == "gas" else 0.95), f"{fluid.name}: too near saturation, {margin:.3f}"


def _fit_gas(table):
    fluid, box = table.fluid, table.fluid.box
    fine = np.linspace(*box, 32 * 12 + 1)
    dilute = np.array([table.formulation.dilute_viscosity(t) for t in fine]) * table.scale
    table.viscosity = fit.curve(fit.FINE, box, fine, dilute)

    pressures = chebyshev(*fluid.pascals, 17)
    t, p = grid(np.linspace(*box, 8 * 20 + 1), pressures)
    viscosity, density = table.truth(t, p)
    base = fit.hermite(fit.FINE, box, t) @ table.viscosity
    move, *_ = fit.pressure_curves(2, box, t, p, viscosity / base - 1.0, base / viscosity, constant=True)
    table.viscosity = fit.curve(fit.FINE, box, fine, dilute * (1.0 + fit.hermite(fit.COARSE, box, fine) @ move))
    base = fit.hermite(fit.FINE, box, t) @ table.viscosity
    table.viscosity_pressure = fit.pressure_curves(2, box, t, p, viscosity / base - 1.0, base / viscosity)
    z = p * table.molar_mass / (R * t * density)
    table.density_pressure = fit.pressure_curves(3, box, t, p, z - 1.0, 1.0 / z)

    coarse = np.linspace(box[0], box[1], 8 * 12 + 1)
    group = [table.formulation.thermal_group(c) for c in coarse]
    table.extra = fit.curve(fit.COARSE, box, coarse, group)


def _fit_liquid(table):
    """Each isotherm is extrapolated to zero pressure by a polynomial, then the curves are fitted as for a gas."""
    fluid, box = table.fluid, table.fluid.box
    temperatures, pressures = np.linspace(*box, 32 * 12 + 1), chebyshev(*fluid.pascals, 9)
    t, p = grid(temperatures, pressures)
    viscosity, density = table.truth(t, p)
    shape, top = (len(temperatures), len(pressures)), fluid.pascals[1]
    vander = np.vander(pressures / top, 3, increasing=True)
    zero = lambda values: np.linalg.lstsq(vander, values.reshape(shape).T, rcond=None)[0][0]
    table.viscosity = fit.curve(fit.FINE, box, temperatures, np.log(zero(viscosity) / fit.LIQUID_SCALE), relative=False)
    table.extra = fit.curve(fit.COARSE, box, temperatures, zero(density))
    base = fit.LIQUID_SCALE * np.exp(fit.hermite(fit.FINE, box, t) @ table.viscosity)
    table.viscosity_pressure = fit.pressure_curves(2, box, t, p, viscosity / base - 1.0, base / viscosity)
    base = fit.hermite(fit.COARSE, box, t) @ table.extra
    table.density_pressure = fit.pressure_curves(3, box, t, p, density / base - 1.0, base / density)


def _measure(table):
    """Worst relative errors in ppm on 419 temperatures off the nodes by 17 pressures, rounded up to 0.01 ppm."""
    low, high = table.fluid.box
    temperatures = np.concatenate([low + (np.arange(417) + 0.37) / 417 * (high - low), [low, high]])
    bottom, top = table.fluid.pascals
    pressures = np.concatenate([np.geomspace(bottom, top, 9), bottom + (top - bottom) * (np.arange(8) + 0.45) / 8])
    t, p = grid(temperatures, pressures)
    true, got = table.truth(t, p), table.evaluate(t, p)
    worst = [float(np.abs(g / w - 1.0).max()) * 1e6 for g, w in zip(got, true)]
    table.residual_viscosity, table.residual_density = (math.ceil(w * 100) / 100 for w in worst)
