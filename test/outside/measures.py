"""Reference values for sketches, robust and circular statistics: NumPy and SciPy."""
import json

import numpy as np
from scipy import stats

rng = np.random.default_rng(20260611)


def quantiles(values):
    """Quantile of rank floor(q (n - 1)), NumPy's method "lower"."""
    asked = [0.0, 0.1, 0.25, 0.5, 0.75, 0.9, 0.99]
    return {"values": [float(v) for v in values], "q": asked,
            "expected": [float(np.quantile(values, q, method="lower")) for q in asked]}


shares = (np.arange(400) + 0.5) / 400
angles = {"a": [350, 10, 20, 5, 355], "b": [170, -170, 175, -160], "d": [10, 20, 100, 200, 300]}
series = {"odd": [2.1, 2.4, 2.3, 2.2, 2.5, 9.7, 2.3], "even": [10, 12, 11, 13, 12, 11, 100, 12],
          "normal": [round(float(v), 12) for v in rng.normal(5, 2, 101)]}

print(json.dumps({
    "numpy.quantile": {
        "one to a hundred": quantiles(np.arange(1.0, 101.0)),
        "lognormal": quantiles(np.round(rng.lognormal(0, 1, 300), 9)),
        "rayleigh": quantiles(np.round(rng.rayleigh(1, 300), 9)),
    },
    # Amplitudes at evenly spaced shares of the distribution, and its median.
    "scipy.stats.rayleigh": {"amplitudes": stats.rayleigh.ppf(shares).tolist(), "median": float(stats.rayleigh.median())},
    "scipy.stats.rice": {str(nu): {"amplitudes": stats.rice.ppf(shares, nu).tolist(),
                                   "median": float(stats.rice.median(nu))} for nu in (0.5, 1.0, 2.0, 5.0)},
    "scipy.stats.median_abs_deviation": {name: {"values": values, "median": float(np.median(values)),
                                                "mad": float(stats.median_abs_deviation(values)),
                                                "sigma": float(stats.median_abs_deviation(values, scale="normal"))}
                                         for name, values in series.items()},
    "scipy.stats.circmean": {name: {"degrees": degrees,
                                    "mean": float(np.degrees(stats.circmean(np.radians(degrees), np.pi, -np.pi))),
                                    "variance": float(stats.circvar(np.radians(degrees))),
                                    "deviation": float(np.degrees(stats.circstd(np.radians(degrees))))}
                             for name, degrees in angles.items()},
}))
