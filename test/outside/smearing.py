"""Bandwidth and time-average smearing of a source in a Gaussian beam, by SciPy's error function (Bridle & Schwab 1999,
ASP Conf. Ser. 180, chapter 18, re-derived) and by averaging the beam over the band. Prints JSON.
"""
import json

import numpy as np
from scipy.integrate import quad
from scipy.special import erf

EARTH_RATE = 7.292115e-5


def square(beta):
    x = np.sqrt(np.log(2)) * beta
    return np.sqrt(np.pi) / (2 * x) * erf(x)


def averaged(beta):
    """A source at theta0 moves in the image by theta0 dnu/nu: the Gaussian beam averaged over the band."""
    value, _ = quad(lambda x: np.exp(-4 * np.log(2) * x * x), -beta / 2, beta / 2)
    return value / beta


betas = [0.1, 0.25, 0.5, 0.75, 1.0, 1.5]
result = {
    "bandwidth": [{"beta": b, "peak": float(square(b)), "averaged": float(averaged(b))} for b in betas],
    "time_at_pole": [
        {"theta_over_beam": q, "tau_s": tau, "peak": float(square(EARTH_RATE * tau * q))}
        for q, tau in [(100, 10), (1000, 10), (500, 60), (50, 300)]
    ],
}
print(json.dumps(result, indent=1))
