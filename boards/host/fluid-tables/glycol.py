"""Water-glycol mixtures: prints the published polynomials as Rust constants, after holding them against the library.

Melinder, "Properties of Secondary Working Fluids for Indirect Systems", IIR handbook (2010), as the property library's
incompressible fluids MEG (ethylene glycol) and MPG (propylene glycol) store it:

    f(x, T) = sum c[i][j] (T - T_base)^i (x - x_base)^j,   i = 0..3, j = 0..5, i + j <= 5

with x the glycol's mass fraction, T in K, f the density in kg/m3 or ln of the viscosity in Pa s, and the freezing
temperature in K as sum c[j] (x - x_base)^j. The handbook's grid is good to about 5 % in viscosity (from memory).
"""

import math

import CoolProp.CoolProp as CP

MIXTURES = {
    "ethylene": {
        "library": "MEG", "t_base": 304.878, "x_base": 0.308462,
        "density": [[1034.0, 131.1, 0.749, -106.2, -96.23, 489.1], [-0.4781, -0.6876, 0.7855, 1.229, -7.211, 0.0],
                    [-0.002692, 0.004805, -0.003995, -0.01153, 0.0, 0.0], [4.725e-06, 1.69e-06, 4.982e-05, 0.0, 0.0, 0.0]],
        "ln_viscosity": [[-6.437255, 2.471, 0.03328, 1.659, 3.089, -18.65], [-0.0255, -0.01171, 0.01086, 0.003157, 0.01831, 0.0],
                         [0.0001782, 0.0001052, 0.0001051, 0.0004063, 0.0, 0.0],
                         [-7.669e-07, -1.634e-06, -6.475e-06, 0.0, 0.0, 0.0]],
        "freezing": [257.9, -80.8, -133.4, -72.93, 100.6, 11.4],
    },
    "propylene": {
        "library": "MPG", "t_base": 305.8583, "x_base": 0.307031,
        "density": [[1018.0, 76.04, -24.98, -155.0, -113.1, 234.2], [-0.5406, -0.945, 0.27, 2.829, -2.221, 0.0],
                    [-0.002666, 0.005541, -0.004018, -0.007175, 0.0, 0.0], [1.347e-05, -1.343e-05, 3.376e-05, 0.0, 0.0, 0.0]],
        "ln_viscosity": [[-6.224055, 3.328, 0.5453, -3.9, -1.587, 35.64], [-0.03045, -0.03984, -0.00086, 0.1054, 0.04475, 0.0],
                         [0.0002525, 0.0004332, -0.0001593, -0.001589, 0.0, 0.0],
                         [-1.399e-06, -1.86e-06, -4.465e-07, 0.0, 0.0, 0.0]],
        "freezing": [259.9, -66.31, -109.4, -228.3, -340.9, 146.5],
    },
}


def polynomial(mixture, key, fraction, kelvin):
    t, x = kelvin - mixture["t_base"], fraction - mixture["x_base"]
    return sum(c * t**i * x**j for i, row in enumerate(mixture[key]) for j, c in enumerate(row))


def freezing(mixture, fraction):
    x = fraction - mixture["x_base"]
    return sum(c * x**j for j, c in enumerate(mixture["freezing"]))


def library(mixture, fraction, kelvin):
    state = CP.AbstractState("INCOMP", mixture["library"])
    state.set_mass_fractions([fraction])
    state.update(CP.PT_INPUTS, 101325.0, kelvin)
    return state.rhomass(), state.viscosity()


def check(mixture):
    """Every 0.05 in fraction and 7 K above freezing: the printed coefficients are the library's, to rounding."""
    count = 0
    for step in range(13):
        fraction = 0.05 * step
        kelvin = max(freezing(mixture, fraction), 253.15) + 1.0
        while kelvin <= 373.15:
            density, viscosity = library(mixture, fraction, kelvin)
            assert abs(polynomial(mixture, "density", fraction, kelvin) / density - 1.0) < 1e-12
            assert abs(math.exp(polynomial(mixture, "ln_viscosity", fraction, kelvin)) / viscosity - 1.0) < 1e-12
            kelvin, count = kelvin + 7.0, count + 1
    return count


def rust(name, mixture):
    lines = [f"// {name} glycol and water, Melinder (2010); x = mass fraction 0..0.6, T from freezing to 373.15 K",
             f"const {name.upper()}_BASE_K: f64 = {mixture['t_base']!r};",
             f"const {name.upper()}_BASE_X: f64 = {mixture['x_base']!r};"]
    for key in ("density", "ln_viscosity"):
        lines.append(f"const {name.upper()}_{key.upper()}: [[f64; 6]; 4] = [ // [power of T - base][power of x - base]")
        lines += ["    [" + ", ".join(repr(c) for c in row) + "]," for row in mixture[key]] + ["];"]
    lines.append(f"const {name.upper()}_FREEZING_K: [f64; 6] = [" + ", ".join(repr(c) for c in mixture["freezing"]) + "];")
    return "\n".join(lines)


def main():
    for name, mixture in MIXTURES.items():
        print(f"// {check(mixture)} states agree with CoolProp {CP.get_global_param_string('version')} to 1e-12")
        print(rust(name, mixture))
        print("// check rows: mass fraction, K, density kg/m3, viscosity Pa s, freezing K (library)")
        for fraction, kelvin in ((0.2, 278.15), (0.3, 273.15), (0.3, 313.15), (0.4, 293.15), (0.6, 353.15)):
            density, viscosity = library(mixture, fraction, kelvin)
            print(f"// {name}, {fraction}, {kelvin}, {density:.9f}, {viscosity:.9e}, {freezing(mixture, fraction):.4f}")


if __name__ == "__main__":
    main()
