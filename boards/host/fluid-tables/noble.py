"""Viscosity of krypton, xenon and neon, for which the property library has an equation of state but no viscosity.

All functions take SI units and return Pa s. The coefficients are those of the papers named beside them; printed_checks.py
holds this file against the values the papers print.

krypton  Polychroniadou, Antoniadis, Assael, Bell, Int. J. Thermophys. 43 (2022) 6 (entropy scaling), with the dilute gas
         of Xiao, Rowland, Al Ghafri, May, J. Phys. Chem. Ref. Data 49 (2020) 013101.
xenon    Velliadou, Tasidou, Antoniadis, Assael, Perkins, Huber, Int. J. Thermophys. 42 (2021) 74: the dilute gas and the
         initial-density term. Its residual term grows as density to the power 2/3, so it adds 0.7 % already at 100 kPa
         with an infinite slope at zero density, which kinetic theory excludes for a gas. It is programmed here so that
         the printed values can be checked, and it is left out of the table; the entry's uncertainty says so.
neon     Huber, NISTIR 8209 (2018): Chapman-Enskog dilute gas with its Lennard-Jones parameters and factor. Initial
         density by the Rainwater-Friend function in the form of Vogel, Kuechenmeister, Bich, Laesecke, J. Phys. Chem.
         Ref. Data 27 (1998) 947, with the same parameters. The only value NISTIR 8209 prints for neon is a liquid at
         40 K, outside what these terms describe, so nothing printed checks them. The ratio mu(T)/mu(298.15 K)
         differs from that of Rabinovich et al. (1988) by -0.14 % at 233 K and +0.31 % at 423 K.
"""

import math

BOLTZMANN = 1.380649e-23
AVOGADRO = 6.02214076e23

KRYPTON_DILUTE = [
    9.129712e-1, -1.001470e-1, -2.454742e-2, 3.145009e-2, -4.456257e-3, -4.511243e-3,
    2.237544e-3, -1.455422e-4, -2.006385e-4, 8.341288e-5, -1.520236e-5, 1.159085e-6,
]
KRYPTON_SCALING = [0.125364, 0.220795, -0.0313726, 0.00313907]
XENON_DILUTE = [
    9.652514e-1, -5.237199e-2, -6.758414e-2, 2.855787e-2, 1.002789e-2, -9.639621e-3,
    1.329770e-3, 1.114305e-3, -5.992234e-4, 1.224218e-4, -9.584978e-6,
]
VIRIAL = [(-19.572881, 0.0), (219.73999, -0.25), (-1015.3226, -0.5), (2471.0125, -0.75), (-3375.1717, -1.0),
          (2491.6597, -1.25), (-787.26086, -1.5), (14.085455, -2.5), (-0.34664158, -5.5)]


def _log_series(reference, coefficients, temperature):
    x = math.log(temperature / 298.15)
    return reference * math.exp(sum(a * x ** (i + 1) for i, a in enumerate(coefficients)))


def initial_density(temperature, energy_k, size_m):
    """Second viscosity virial coefficient in m3/mol."""
    reduced = temperature / energy_k
    return AVOGADRO * size_m**3 * sum(b * reduced**t for b, t in VIRIAL)


def krypton(state, temperature, density):
    """`density` in mol/m3; `state` is the library's state, already at that point. Zero density gives the dilute gas."""
    dilute = _log_series(25.3062e-6, KRYPTON_DILUTE, temperature)
    if density == 0.0:
        return dilute
    mass = 0.083798 / AVOGADRO
    entropy = -state.smolar_residual() / state.gas_constant()
    volume = (state.Bvirial() + temperature * state.dBvirial_dT()) / AVOGADRO
    thermal = math.sqrt(mass * BOLTZMANN * temperature)
    plus = dilute / thermal * volume ** (2 / 3)
    plus += 1.05 * (math.exp(sum(c * entropy ** (i + 1) for i, c in enumerate(KRYPTON_SCALING))) - 1.0)
    return (density * AVOGADRO) ** (2 / 3) * thermal * plus / entropy ** (2 / 3)


def xenon(temperature, density, residual=False):
    """`density` in mol/m3. With `residual` the whole published formulation, without it the part the table uses."""
    dilute = _log_series(23.0183e-6, XENON_DILUTE, temperature)
    value = dilute * (1.0 + initial_density(temperature, 250.0, 0.396e-9) * density)
    if residual:
        t, r = temperature / 289.733, density / 8400.0
        value += 1e-6 * r ** (2 / 3) * t**0.5 * (
            t + 1.396328251 * t * r**4 + 5.418871011e-4 * r**12 / t + (4.478809952 + 24.91698858 * r) / t**2)
    return value


def neon(temperature, density):
    """`density` in mol/m3."""
    t = temperature / 45.58
    integral = (1.16145 * t**-0.14874 + 0.52487 * math.exp(-0.77320 * t) + 2.16178 * math.exp(-2.43787 * t)
                - 6.435e-4 * t**0.14874 * math.sin(18.0323 * t**-0.7683 - 7.27371))
    dilute = 0.989544 * 26.692e-9 * math.sqrt(20.179 * temperature) / (0.2707**2 * integral)
    return dilute * (1.0 + initial_density(temperature, 45.58, 0.2707e-9) * density)
