"""Moist air: the small corrections the library applies to its dry-air table, fitted and measured here.

    python moist_air.py            prints constants and worst errors
    python moist_air.py --write    also writes tests/published/moist_air.csv

Density is checked against CIPM-2007 (Picard, Davis, Glaser, Fujii, Metrologia 45 (2008) 149), whose equation is
programmed below, and against the library's humid-air functions; viscosity against those functions alone. Their
viscosity is Wilke's mixing rule with the viscosity of saturated steam at the total pressure, that is of steam at some
100 C whatever the air's temperature (found here: the two agree to 1e-8), so its trend with temperature and pressure is
not physical and its slope in x_w is one of three candidates, see the caution that is printed.

The constants of the CIPM-2007 equation were typed from memory and then found to give the density, mole fraction and Z
of an independent computation to all its printed digits (15..27 C, 80..105 kPa, 0..100 %).
"""

import pathlib
import sys

import CoolProp.CoolProp as CP
import numpy as np

R = 8.31446261815324
M_AIR, M_WATER = 28.96546e-3, 18.01528e-3
EPSILON = 1.0 - M_WATER / M_AIR  # 0.378
TARGET = pathlib.Path(__file__).resolve().parents[3] / "tests/published/moist_air.csv"


def saturation_pressure(kelvin):
    """Pa over water, CIPM-2007 equation A1.1."""
    return np.exp(1.2378847e-5 * kelvin**2 - 1.9121316e-2 * kelvin + 33.93711047 - 6.3431645e3 / kelvin)


def enhancement(kelvin, pascals):
    """CIPM-2007 equation A1.2."""
    return 1.00062 + 3.14e-8 * pascals + 5.6e-7 * (kelvin - 273.15) ** 2


def water_fraction(kelvin, pascals, humidity):
    """Mole fraction of water vapour."""
    return humidity * enhancement(kelvin, pascals) * saturation_pressure(kelvin) / pascals


def cipm_z(kelvin, pascals, x):
    """Compressibility factor, CIPM-2007 equation A1.4."""
    t = kelvin - 273.15
    first = 1.58123e-6 - 2.9331e-8 * t + 1.1043e-10 * t**2
    first += (5.707e-6 - 2.051e-8 * t) * x + (1.9898e-4 - 2.376e-6 * t) * x**2
    return 1.0 - pascals / kelvin * first + (pascals / kelvin) ** 2 * (1.83e-11 - 0.765e-8 * x**2)


def cipm_density(kelvin, pascals, x, gas_constant=8.314472):
    """kg/m3; the published equation uses the 2002 gas constant."""
    return pascals * M_AIR / (cipm_z(kelvin, pascals, x) * gas_constant * kelvin) * (1.0 - x * EPSILON)


def library(kelvin, pascals, humidity):
    """(viscosity, density, mole fraction) of the library's humid air; its density is 1/Vha, per volume of moist air."""
    call = lambda what: CP.HAPropsSI(what, "T", kelvin, "P", pascals, "R", humidity)
    return call("mu"), 1.0 / call("Vha"), call("psi_w")


def dry(kelvin, pascals):
    """(viscosity, Z) of dry air in the table's formulation."""
    state = CP.AbstractState("HEOS", "Air")
    state.specify_phase(CP.iphase_gas)
    state.update(CP.PT_INPUTS, pascals, kelvin)
    return state.viscosity(), pascals / (state.rhomolar() * state.gas_constant() * kelvin)


def steam_viscosity(kelvin):
    """Dilute steam, IAPWS R12-08."""
    state = CP.AbstractState("HEOS", "Water")
    state.specify_phase(CP.iphase_gas)
    state.update(CP.DmolarT_INPUTS, 1e-6, kelvin)
    return state.viscosity()


def wilke(x, air, steam):
    """Wilke's mixing rule for the viscosity of moist air."""
    pair = lambda a, b, ma, mb: (1 + np.sqrt(a / b) * (mb / ma) ** 0.25) ** 2 / np.sqrt(8 * (1 + ma / mb))
    first = (1 - x) * air / (1 - x + x * pair(air, steam, M_AIR, M_WATER))
    return first + x * steam / (x + (1 - x) * pair(steam, air, M_WATER, M_AIR))


def grid():
    """Columns T, p, RH, library viscosity, moist/dry density ratio, library x, CIPM x, dry viscosity, dry Z."""
    rows = []
    for celsius in np.linspace(0.1, 60.0, 13):
        for pascals in (8e4, 9e4, 101325.0, 1.1e5):
            for humidity in (0.0, 0.1, 0.25, 0.5, 0.75, 1.0):
                kelvin = celsius + 273.15
                viscosity, density, x = library(kelvin, pascals, humidity)
                ratio = density / library(kelvin, pascals, 0.0)[1]
                rows.append((kelvin, pascals, humidity, viscosity, ratio, x,
                             water_fraction(kelvin, pascals, humidity), *dry(kelvin, pascals)))
    return np.array(rows).T


def report():
    """Prints the constants and what they miss."""
    t, p, _, viscosity, ratio, x, xw, dry_viscosity, dry_z = grid()
    warm = t - 293.15
    parts = (("15..27 C", (t > 288) & (t < 300.2)), ("0..40 C", t < 313.2), ("0..60 C", t < 400))
    print(f"molar masses {M_AIR}, {M_WATER} kg/mol; 1 - Mw/Ma = {EPSILON:.6f}")
    wet = x > 0
    print(f"x_w of CIPM-2007 against the library: {np.abs(xw[wet] / x[wet] - 1).max():.1e} relative, worst on the grid")

    print("density: rho = p Ma (1 - 0.378 x_w) / (R T Z), Z = Z_dry(T, p) + (p/T) (e1 x_w + (e2 + e3 (T - 293.15)) x_w^2)")
    matrix = np.array([x, x**2, x**2 * warm]).T * (p / t)[:, None]
    e = np.linalg.lstsq(matrix, dry_z * (1 - x * EPSILON) / ratio - dry_z, rcond=None)[0]
    print("  e1, e2, e3 =", ", ".join(f"{v:.6e}" for v in e), "K/Pa (e3: 1/Pa)")
    z = dry_z + (p / t) * (e[0] * xw + (e[1] + e[2] * warm) * xw**2)
    cipm = cipm_density(t, p, xw, R)
    got = p * M_AIR * (1 - xw * EPSILON) / (R * t * z)
    for label, part in parts:
        errors = [(1 - xw * EPSILON) * dry_z / value / ratio - 1 for value in (z, dry_z)]
        worst = [1e6 * np.abs(error[part]).max() for error in errors]
        print(f"  {label}: moist/dry ratio against the library {worst[0]:.0f} ppm (with Z = Z_dry {worst[1]:.0f} ppm); "
              f"density against CIPM-2007 {1e6 * np.abs(got / cipm - 1)[part].max():.0f} ppm")

    print("viscosity: mu = mu_dry (1 - x_w (m0 + m1 (T - 293.15)))")
    drop = 1 - viscosity / dry_viscosity
    m = np.linalg.lstsq(np.array([x, x * warm]).T, drop, rcond=None)[0]
    print("  m0, m1 =", ", ".join(f"{v:.6e}" for v in m))
    for label, part in parts:
        print(f"  {label}: worst error against the library {100 * np.abs(drop - x * (m[0] + m[1] * warm))[part].max():.2f} %")
    steam = np.array([steam_viscosity(v) for v in t])
    other = 1 - wilke(x, dry_viscosity, steam) / dry_viscosity
    near = wet & (np.abs(warm) < 3)
    print(f"  caution: with steam at the air's own temperature Wilke's rule gives m0 = {np.mean(other[near] / x[near]):.3f};")
    print("  the library takes saturated steam at the total pressure, some 100 C, and a fit of measured moist air known from")
    print("  memory has about 0.10. So m0 is 0.3 +- 0.2 (limits): give the result u(mu)/mu = 0.12 x_w, 0.14 % at 20 C and 50 %")


def write():
    """About 40 rows for the tests, each with the source of its density."""
    lines = ["# moist air; written by boards/host/fluid-tables/moist_air.py --write",
             "# rho: source CIPM-2007 = published equation with its R = 8.314472 (22 ppm, from memory), source library = 1/Vha of",
             "# CoolProp 8.0.0 HAPropsSI; mu: always HAPropsSI (Wilke; its x_w term is uncertain by two thirds, see the script)",
             "T_C,RH,p_Pa,x_w,mu_Pa_s,rho_kg_m3,source"]
    inside = [(c, h, p) for c in (15.0, 20.0, 23.0, 27.0) for h in (0.0, 0.2, 0.5, 1.0) for p in (8e4, 101325.0)]
    outside = [(c, h, 101325.0) for c in (0.1, 10.0, 35.0, 50.0, 60.0) for h in (0.5, 1.0)]
    for celsius, humidity, pascals in inside + outside:
        kelvin = celsius + 273.15
        viscosity, density, x = library(kelvin, pascals, humidity)
        source = "library"
        if 15.0 <= celsius <= 27.0:
            x, source = water_fraction(kelvin, pascals, humidity), "CIPM-2007"
            density = cipm_density(kelvin, pascals, x)
        lines.append(f"{celsius:g},{humidity:g},{pascals:g},{x:.8f},{viscosity:.9e},{density:.9f},{source}")
    TARGET.write_text("\n".join(lines) + "\n")


if __name__ == "__main__":
    report()
    if "--write" in sys.argv[1:]:
        write()
