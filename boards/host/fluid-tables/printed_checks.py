"""The first step: the library must reproduce the values the papers print, or no table is written."""

import csv
import pathlib

import CoolProp
import CoolProp.CoolProp as CP

import noble

LIBRARY_VERSION = "8.0.0"
PATH = pathlib.Path(__file__).with_name("printed_checks.csv")


def _value(fluid, temperature, state, unit):
    dilute = state < 1e-4 and unit != "Pa"
    handle = CP.AbstractState("HEOS", fluid)
    if unit == "Pa":
        handle.update(CP.PT_INPUTS, state, temperature)
        return handle.viscosity()
    molar = state if unit == "mol/m3" else state / handle.molar_mass()
    if fluid == "Xenon":
        return noble.xenon(temperature, molar, residual=not dilute)
    if fluid == "Krypton" and dilute:
        return noble.krypton(None, temperature, 0.0)
    handle.specify_phase(CP.iphase_gas)
    handle.update(CP.DmolarT_INPUTS, 1e-7 if dilute else molar, temperature)
    return noble.krypton(handle, temperature, molar) if fluid == "Krypton" else handle.viscosity()


def assert_all():
    """Raises AssertionError at the first printed value the library misses; returns how many rows passed."""
    assert CoolProp.__version__ == LIBRARY_VERSION, f"CoolProp {CoolProp.__version__}, tables need {LIBRARY_VERSION}"
    passed = 0
    with PATH.open(newline="") as handle:
        for row in csv.DictReader(line for line in handle if not line.startswith("#")):
            printed, tolerance = float(row["mu_printed_uPa_s"]), float(row["tolerance_rel"])
            value = 1e6 * _value(row["fluid"], float(row["T_K"]), float(row["state"]), row["state_unit"])
            error = value / printed - 1.0
            assert abs(error) <= tolerance, f"{row}: computed {value:.8g} uPa s, off by {error:.2e}"
            passed += 1
    return passed
