"""Noise of images by simulation in NumPy: visibilities of Gaussian noise, imaged by direct sums at places far apart, for
weights that are true and for weights that are not; and the radiometer equation with SciPy's constants. Prints JSON.
"""
import json

import numpy as np
from scipy.constants import k

random = np.random.default_rng(5)
count, places, rounds = 400, 200, 150
u, v = random.normal(0, 3000, (2, count))
sigma = random.choice([0.5, 1.0, 2.0], count)
l, m = random.uniform(-0.01, 0.01, (2, places))
wave = np.exp(2j * np.pi * (np.outer(l, u) + np.outer(m, v)))


def simulated(t):
    values = []
    for _ in range(rounds):
        noise = sigma * (random.normal(size=count) + 1j * random.normal(size=count))
        values.append((wave @ (t * noise)).real / t.sum())
    return float(np.std(values))


weights = {"true": 1 / sigma**2, "equal": np.ones(count)}
sefd, efficiency, antennas, polarizations, bandwidth, time = 420.0, 0.93, 27, 2, 1e9, 3600.0
result = {
    "u": u.tolist(),
    "v": v.tolist(),
    "sigma": sigma.tolist(),
    "images": {name: {"rms": simulated(t), "formula": float(np.sqrt(np.sum(t**2 * sigma**2)) / t.sum())} for name, t in weights.items()},
    "radiometer_image_jy": sefd / (efficiency * np.sqrt(polarizations * antennas * (antennas - 1) * bandwidth * time)),
    "sefd_jy": float(2 * k * 30.0 / (0.6 * np.pi * 25.0**2 / 4) * 1e26),
}
print(json.dumps(result, indent=1))
