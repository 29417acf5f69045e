#!/usr/bin/env python3
"""Makes the bench runs of this folder: a workshop of our own invention, with noise, the same on every run.

    python3 make.py            write the CSV files beside this script
    python3 make.py --check    say whether the files are what this script makes

Nothing here comes from the library. A flow is found by marching the mean momentum equation of a compressible gas along
each tube; bores are not those of the drawing and differ from tube to tube; gases have simple formulas of their own. So
the files try the whole way from a bench to a flow, not the arithmetic against itself.
"""

import math
import random
import sys
from pathlib import Path

R = 8.314462618
LENGTH, BORE, TUBES = 0.120, 0.44e-3, 120  # the drawing, m
BORE_ERROR, BORE_SPREAD = 0.006, 0.02  # what the workshop delivered: mean and standard deviation, relative
EXPANSION, T_DRAWING = 16e-6, 293.15
GROUPS, STEPS = 12, 60  # tubes of one size marched together; steps along a tube
ZERO_C = 273.15

# Molar mass kg/mol; viscosity Pa s at 25 C and 101.325 kPa, its exponent dln mu/dln T at 25 C, Sutherland temperature K
# (0: a plain power law), change per pascal; second virial coefficient at 20 C in m3/mol and its slope per kelvin;
# Prandtl number; ratio of heat capacities.
GASES = {
    "nitrogen": dict(m=28.0135e-3, mu=17.760e-6, s=111.0, kp=7.0e-9, b=-6.0e-6, bt=0.20e-6, pr=0.72, gamma=1.400),
    "air": dict(m=28.9655e-3, mu=18.447e-6, s=116.0, kp=7.2e-9, b=-8.6e-6, bt=0.22e-6, pr=0.71, gamma=1.401),
    "helium": dict(m=4.002602e-3, mu=19.829e-6, power=0.685, kp=1.8e-9, b=11.9e-6, bt=0.0, pr=0.665, gamma=1.667),
}


class Noise:
    """Normal deviates from uniform ones, so that no library's choice of method can change the files."""

    def __init__(self, seed):
        self.uniform = random.Random(seed).random

    def __call__(self, sigma):
        return sigma * math.sqrt(-2.0 * math.log(1.0 - self.uniform())) * math.cos(2.0 * math.pi * self.uniform())


class Gas:
    """A gas at one temperature; moist when a mole fraction of water is given."""

    def __init__(self, name, t, water=0.0):
        g = GASES[name]
        self.t, self.kp, self.b = t, g["kp"], g["b"] + g["bt"] * (t - 293.15)
        # Water makes air lighter and thinner: 0.30 per mole fraction, from memory.
        self.m = g["m"] * (1.0 - water) + 18.0153e-3 * water
        ratio = t / 298.15
        shape = ratio ** g["power"] if "power" in g else ratio**1.5 * (298.15 + g["s"]) / (t + g["s"])
        self.mu25 = g["mu"] * shape * (1.0 - 0.30 * water)
        n = g.get("power", 1.5 - t / (t + g.get("s", 0.0)))
        # Kinetic-energy factor 2 of a parabola, less the part of the gas being colder than the wall.
        self.c_expansion = 2.0 - (1.0 + n / 3.0) * g["pr"] * (g["gamma"] - 1.0) / g["gamma"]

    def viscosity(self, p):
        return self.mu25 * (1.0 + self.kp * (p - 101325.0))

    def density(self, p):
        return p * self.m / (R * self.t) / (1.0 + self.b * p / (R * self.t))

    def slip_length(self, p):
        return 1.016 * self.viscosity(p) * math.sqrt(2.0 * R * self.t / self.m) / p


def developing_friction(x):
    """f_app Re x+ of the laminar entrance of a round tube: Shah's correlation of 1978, from memory."""
    root = 3.44 / math.sqrt(x)
    return x * (root + (16.0 + 0.3125 / x - root) / (1.0 + 0.00021 / (x * x)))


def outlet(gas, p1, flow, bore, length):
    """Pressure at the end of a tube that takes `flow` (kg/s) from a plenum at p1; None below vacuum."""
    g = flow / (math.pi / 4.0 * bore * bore)
    p = p1 - g * g / (2.0 * gas.density(p1))
    before = 0.0
    for i in range(1, STEPS + 1):
        z = length * (i / STEPS) ** 2  # short steps where the flow develops
        reynolds = g * bore / gas.viscosity(p)
        friction = developing_friction(z / (bore * reynolds))
        middle = p
        for _ in range(2):  # density, slip and expansion at the middle of the step
            rho = gas.density(middle)
            viscous = 2.0 * g * g * (friction - before) / (1.0 + 8.0 * gas.slip_length(middle) / bore)
            step = viscous / (rho - gas.c_expansion * g * g / middle)
            middle = p - 0.5 * step
        p, before = p - step, friction
        if p <= 0.0:
            return None
    return p


def tube_flow(gas, p1, drop, bore, length):
    """Mass flow of one tube, kg/s, by the secant method."""
    mu, rho = gas.viscosity(p1), gas.density(p1 - 0.5 * drop)
    guess = math.pi * bore**4 * rho * drop / (128.0 * mu * length)
    miss = lambda m: p1 - outlet(gas, p1, m, bore, length) - drop
    low, high = 0.9 * guess, 0.99 * guess
    f_low, f_high = miss(low), miss(high)
    for _ in range(20):
        if f_high == f_low or abs(high - low) < 1e-13 * high:
            break
        low, f_low, high = high, f_high, high - f_high * (high - low) / (f_high - f_low)
        f_high = miss(high)
    return high


def bundle(noise):
    """Mean bores of the groups, from a bundle as delivered."""
    bores = sorted(BORE * (1.0 + BORE_ERROR + noise(BORE_SPREAD)) for _ in range(TUBES))
    per = TUBES // GROUPS
    return [sum(bores[i : i + per]) / per for i in range(0, TUBES, per)]


def element_flow(bores, gas, p1, drop):
    """Mass flow of the element, kg/s; a negative drop drives it the other way, p1 being the marked port."""
    if drop == 0.0:
        return 0.0
    grown = 1.0 + EXPANSION * (gas.t - T_DRAWING)
    inlet = p1 if drop > 0.0 else p1 - drop
    each = [tube_flow(gas, inlet, abs(drop), bore * grown, LENGTH * grown) for bore in bores]
    return math.copysign(TUBES / GROUPS * sum(each), drop)


def water_fraction(humidity, t, p):
    """Mole fraction of water in moist air: Magnus formula, from memory."""
    c = t - ZERO_C
    return humidity * 611.2 * math.exp(17.62 * c / (243.12 + c)) / p


NITROGEN_HEAD = """\
# Bench run of element EB-0042 on nitrogen. Invented: no such bench exists; made with noise by make.py.
# Eight pressure drops from 3 to 100 % of 2.5 kPa, each taken twice; the piston prover that gives the reference flow
# stands downstream, at its own temperature and pressure. Columns u_..._common hold what all points share.
"""

DAY_HEAD = """\
# A day of readings of element EB-0042: air of the room with its humidity, then helium. Invented, made with noise by
# make.py. made_flow_g_min is the flow the readings were made from, which no instrument would know; a column the tool
# does not know is carried through. One row has a broken temperature sensor, one a missing pressure drop.
"""

GAS_HEAD = """\
# Process gas, viscosity and density over temperature at 101.325 kPa. Invented, made by make.py: a welding gas of argon
# with some carbon dioxide, mean molar mass 40.7 g/mol.
"""


def bench_nitrogen(bores, noise):
    header = (
        "pressure_drop_Pa,u_pressure_drop_Pa,temperature_C,u_temperature_K,u_temperature_common_K,line_pressure_kPa,"
        "u_line_pressure_kPa,reference_flow_L_min,reference_temperature_C,reference_pressure_kPa,u_reference_flow_pct,"
        "u_reference_flow_common_pct,fluid"
    )
    drops = [75.0, 105.0, 150.0, 230.0, 380.0, 800.0, 1500.0, 2500.0]
    common_flow, common_t = noise(0.0010), noise(0.03)
    rows = [header]
    for repeat in range(2):
        for i, nominal in enumerate(drops if repeat == 0 else reversed(drops)):
            t = ZERO_C + 21.6 + 0.09 * (i + 8 * repeat)
            p1 = 118.0e3 + 0.4 * nominal + 250.0 * repeat
            drop = nominal * (1.0 + noise(0.004))
            gas = Gas("nitrogen", t)
            t_ref, p_ref = ZERO_C + 22.4 + 0.05 * i, 100.3e3 - 15.0 * i
            reference = element_flow(bores, gas, p1, drop) / Gas("nitrogen", t_ref).density(p_ref)
            u_drop = round(math.hypot(0.0004 * drop, 0.03), 3)
            cells = [
                f"{drop + noise(u_drop):.3f}", f"{u_drop:.3f}",
                f"{t - ZERO_C + common_t + noise(0.02):.3f}", "0.02", "0.03",
                f"{(p1 + noise(20.0)) / 1e3:.3f}", "0.020",
                f"{reference * 6e4 * (1.0 + common_flow + noise(0.0005)):.5f}",
                f"{t_ref - ZERO_C:.2f}", f"{p_ref / 1e3:.3f}", "0.05", "0.10", "nitrogen",
            ]
            rows.append(",".join(cells))
    return NITROGEN_HEAD + "\n".join(rows) + "\n"


def day_drop(i):
    """Pressure drop of a reading, Pa: a process that starts, settles, idles, runs backward and changes gas."""
    if i < 6:
        return 150.0 + 380.0 * i
    if i < 24:
        return 1500.0 + 700.0 * math.sin(0.55 * i)
    if i < 29:
        return 0.0
    if i < 34:
        return -(180.0 + 160.0 * (i - 29))
    return 300.0 + 2000.0 * abs(math.sin(0.21 * (i - 33)))


def day_air_helium(bores, noise):
    rows = ["time_s,pressure_drop_Pa,temperature_C,line_pressure_kPa,relative_humidity_pct,fluid,made_flow_g_min"]
    for i in range(60):
        name = "air" if i < 38 else "helium"
        t = ZERO_C + 25.0 + 10.0 * math.sin(2.0 * math.pi * (i - 18) / 60.0)
        p1 = 1e3 * (137.0 - 42.0 * math.cos(2.0 * math.pi * i / 47.0)) if name == "helium" else 1e3 * (101.0 + 0.5 * i)
        humidity = 0.46 + 0.10 * math.cos(0.3 * i) if name == "air" else 0.0
        gas = Gas(name, t, water_fraction(humidity, t, p1))
        drop = day_drop(i)
        flow = element_flow(bores, gas, p1, drop)
        read_t = f"{t - ZERO_C + noise(0.05):.2f}"
        cells = [
            str(600 * i), f"{drop + noise(math.hypot(0.0005 * drop, 0.1)):.2f}", read_t,
            f"{p1 * (1.0 + noise(0.0005)) / 1e3:.3f}", f"{100.0 * (humidity + noise(0.01)):.1f}" if name == "air" else "",
            name, f"{flow * 6e4:.5f}",
        ]
        if i == 15:
            cells[2] = "-242.02"  # a shorted platinum resistor
        if i == 47:
            cells[1] = ""
        rows.append(",".join(cells))
    return DAY_HEAD + "\n".join(rows) + "\n"


def process_gas():
    rows = ["temperature_C,viscosity_Pa_s,density_kg_m3"]
    molar_mass, p = 40.68e-3, 101325.0
    for celsius in range(0, 101, 10):
        t = celsius + ZERO_C
        viscosity = 21.6e-6 * (t / 298.15) ** 1.5 * (298.15 + 160.0) / (t + 160.0)
        b = -28e-6 + 0.30e-6 * (t - 293.15) - 0.0011e-6 * (t - 293.15) ** 2
        density = p * molar_mass / (R * t) / (1.0 + b * p / (R * t))
        rows.append(f"{celsius},{viscosity:.5e},{density:.5f}")
    return GAS_HEAD + "\n".join(rows) + "\n"


def files():
    noise = Noise(42)
    bores = bundle(noise)
    return {
        "bench-nitrogen.csv": bench_nitrogen(bores, noise),
        "day-air-helium.csv": day_air_helium(bores, noise),
        "process-gas.csv": process_gas(),
    }


def main():
    folder = Path(__file__).resolve().parent
    if sys.argv[1:] not in ([], ["--check"]):
        sys.exit(__doc__)
    different = []
    for name, text in files().items():
        path = folder / name
        if not sys.argv[1:]:
            path.write_bytes(text.encode())
        elif not path.exists() or path.read_bytes() != text.encode():
            different.append(name)
    if different:
        sys.exit("not what make.py makes: " + ", ".join(different))


if __name__ == "__main__":
    main()
