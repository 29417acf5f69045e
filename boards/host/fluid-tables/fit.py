"""Least-squares tables: cubic Hermite curves on uniform segments, nodes rounded to single precision.

A curve is linear in its node values and slopes, so a table that is linear in its curves is fitted to dense data in one
least-squares solution instead of sampling the formulation at the nodes; kinks in a formulation then spread evenly.
"""

import numpy as np

FINE, COARSE = 33, 9
# Viscosity, Pa s, that the logarithm of a liquid counts from; the library calls it by the same name.
LIQUID_SCALE = 0.01
ROUNDS = 6


def hermite(nodes, box, temperature):
    """Matrix of the curve values at `temperature` for unknowns [y0, m0, y1, m1, ...], slopes per segment."""
    u = (np.asarray(temperature) - box[0]) / (box[1] - box[0]) * (nodes - 1)
    segment = np.clip(u.astype(int), 0, nodes - 2)
    t = u - segment
    matrix = np.zeros((len(u), 2 * nodes))
    rows = np.arange(len(u))
    matrix[rows, 2 * segment] = (1 + 2 * t) * (1 - t) ** 2
    matrix[rows, 2 * segment + 1] = t * (1 - t) ** 2
    matrix[rows, 2 * segment + 2] = t * t * (3 - 2 * t)
    matrix[rows, 2 * segment + 3] = t * t * (t - 1)
    return matrix


def single(values):
    """Rounded to single precision, kept as double."""
    return np.asarray(values, dtype=np.float32).astype(np.float64)


def solve(matrix, target, weight):
    """Weighted least squares, reweighted towards the smallest worst error (Lawson)."""
    emphasis = np.ones(len(target))
    for _ in range(ROUNDS):
        w = weight * np.sqrt(emphasis)
        scale = np.linalg.norm(matrix * w[:, None], axis=0)
        scale[scale == 0.0] = 1.0
        solution = np.linalg.lstsq(matrix * w[:, None] / scale, target * w, rcond=1e-13)[0] / scale
        error = np.abs((matrix @ solution - target) * weight)
        emphasis *= error / error.max() + 0.05
        emphasis /= emphasis.mean()
    return solution


def curve(nodes, box, temperature, values, relative=True):
    """One curve through (temperature, values)."""
    values = np.asarray(values)
    weight = 1.0 / np.abs(values) if relative else np.ones(len(values))
    return single(solve(hermite(nodes, box, temperature), values, weight))


def pressure_curves(count, box, temperature, pressure, target, weight, constant=False):
    """`count` coarse curves c_i with sum c_i(T) p^i (i = 1..count) close to `target`.

    With `constant` a curve c_0 comes first: a few ppm by which the zero-pressure curve is to be moved so that the
    worst error over the whole pressure range is smallest.
    """
    top = pressure.max()
    powers = range(0 if constant else 1, count + 1)
    basis = hermite(COARSE, box, temperature)
    matrix = np.hstack([basis * ((pressure / top) ** i)[:, None] for i in powers])
    solution = solve(matrix, target, weight).reshape(len(powers), -1)
    return [single(solution[j] / top**i) for j, i in enumerate(powers)]


def polynomial(curves, box, temperature, pressure):
    """1 + sum c_i(T) p^i."""
    basis = hermite(COARSE, box, temperature)
    return 1.0 + sum((basis @ c) * pressure ** (i + 1) for i, c in enumerate(curves))
