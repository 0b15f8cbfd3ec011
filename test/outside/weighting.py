"""Robust weights of invented samples in NumPy, by their formula (Briggs 1995, PhD thesis, chapter 3), and what they do to
the noise. Prints JSON.
"""
import json

import numpy as np

random = np.random.default_rng(11)
field = 0.01
u = np.round(random.normal(0, 1500, 120), 3)
v = np.round(random.normal(0, 900, 120), 3)
weight = np.round(random.uniform(0.5, 4, 120), 3)
# Some in the cell of the origin, which holds their conjugates too.
u[:4] = [10, -20, 30, 5]
v[:4] = [15, 10, -25, -40]

cells = {}
key = lambda a, b: (int(np.floor(a * field + 0.5)), int(np.floor(b * field + 0.5)))
for a, b, w in zip(u, v, weight):
    for sign in (1, -1):
        cells[key(sign * a, sign * b)] = cells.get(key(sign * a, sign * b), 0) + w
density = np.array([cells[key(a, b)] for a, b in zip(u, v)])
squares = sum(value**2 for value in cells.values())

result = {"field_rad": field, "u": u.tolist(), "v": v.tolist(), "weight": weight.tolist(), "weightings": []}
for robust in (None, -2.0, 0.0, 0.5, 2.0):
    if robust is None:
        t = weight / density
    else:
        f2 = (5 * 10.0**-robust) ** 2 / (squares / (2 * weight.sum()))
        t = weight / (1 + density * f2)
    noise = np.sqrt(np.sum(t**2 / weight)) / t.sum()
    result["weightings"].append({"robust": robust, "imaging": t.tolist(), "noise": float(noise)})
result["natural_noise"] = float(1 / np.sqrt(weight.sum()))
print(json.dumps(result, indent=1))
