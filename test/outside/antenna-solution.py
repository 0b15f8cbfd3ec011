"""Antenna phases and gains from baselines: SciPy's robust least squares with the Cauchy loss, and plain least squares.

Prints JSON. Phases in degrees relative to the median antenna, gains as natural logarithms likewise.
"""
import json

import numpy as np
from scipy.optimize import least_squares

RANDOM = np.random.default_rng(20260301)


def pairs(antennas):
    return [(i, j) for i in range(antennas) for j in range(i + 1, antennas)]


def solve(antennas, values, sigma, sign):
    first, second = np.array(pairs(antennas)).T

    def residuals(x):
        return (values - (x[first] + sign * x[second])) / sigma

    x = np.zeros(antennas)
    scale = 1.0
    for _ in range(60):
        x = least_squares(residuals, x, loss="cauchy", f_scale=2.5 * scale, xtol=1e-14, ftol=1e-14, gtol=1e-14).x
        scale = max(1.0, 1.4826 * float(np.median(np.abs(residuals(x)))))
    return x - np.median(x)


def case(antennas, noise, outlier, sign):
    true = RANDOM.normal(0, 0.6, antennas)
    both = pairs(antennas)
    values = np.array([true[i] + sign * true[j] for i, j in both]) + RANDOM.normal(0, noise, len(both))
    values[3] += outlier
    return {
        "antennas": antennas, "sigma": noise, "values": values.tolist(),
        "solution": solve(antennas, values, noise, sign).tolist(),
    }


print(json.dumps({
    "phases": [case(n, 0.03, outlier, -1) for n in (6, 9, 16) for outlier in (0.0, 0.5)],
    "gains": [case(n, 0.02, outlier, 1) for n in (6, 9, 16) for outlier in (0.0, 0.4)],
}, indent=1))
