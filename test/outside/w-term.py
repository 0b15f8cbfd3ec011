"""What w does to a point source at the edge of the field, imaged without a correction: images by direct sums in NumPy of an
invented array, the peak looked for near the source's place. Prints JSON.
"""
import json

import numpy as np
from scipy.optimize import minimize

C = 299792458.0
RAD = np.pi / 180
LATITUDE = -31.0
FREQUENCY = 1.2e9


def positions():
    antennas = []
    for arm in range(3):
        for k in range(1, 5):
            radius = 900 * (k / 4) ** 1.7
            azimuth = (arm * 120 + 5) * RAD
            antennas.append([radius * np.sin(azimuth), radius * np.cos(azimuth), 4 * np.sin(7 * (arm * 4 + k))])
    return antennas


def uvw(antennas, declination, hours):
    f, d = LATITUDE * RAD, declination * RAD
    enu = np.array(antennas)
    xyz = np.stack([-np.sin(f) * enu[:, 1] + np.cos(f) * enu[:, 2], enu[:, 0], np.cos(f) * enu[:, 1] + np.sin(f) * enu[:, 2]], 1)
    rows = []
    for hour in hours * 15 * RAD:
        for i in range(len(xyz)):
            for j in range(i + 1, len(xyz)):
                x, y, z = xyz[i] - xyz[j]
                u = np.sin(hour) * x + np.cos(hour) * y
                v = -np.sin(d) * np.cos(hour) * x + np.sin(d) * np.sin(hour) * y + np.cos(d) * z
                w = np.cos(d) * np.cos(hour) * x - np.cos(d) * np.sin(hour) * y + np.sin(d) * z
                rows.append([u, v, w])
    return np.array(rows).T * FREQUENCY / C


def peak(u, v, w, l, m):
    n = np.sqrt(1 - l * l - m * m)
    source = np.exp(-2j * np.pi * (u * l + v * m + w * (n - 1)))
    image = lambda a, b: float(np.mean((source * np.exp(2j * np.pi * (u * a + v * b))).real))
    step = 0.3 / np.max(np.hypot(u, v))
    # The source is displaced by up to what the extreme planes w = a u + b v do.
    reach = 3 * (1 - n)
    count = int(np.ceil(reach / step))
    best = max(((image(l + i * step, m + j * step), i, j) for i in range(-count, count + 1) for j in range(-count, count + 1)))
    start = np.array([best[1] * step, best[2] * step])
    found = minimize(lambda p: -image(l + p[0] * step, m + p[1] * step), start / step, method="Nelder-Mead", options={"xatol": 1e-6, "fatol": 1e-10})
    return -found.fun, found.x * step


def main():
    antennas = positions()
    cases = []
    for name, declination, hours, field_deg in [
        ("six hours, three degrees", -10.0, np.linspace(-3, 3, 25), 3.0),
        ("six hours, four and a half degrees", -10.0, np.linspace(-3, 3, 25), 4.5),
        ("an hour low in the north", 25.0, np.linspace(-0.5, 0.5, 11), 4.0),
        ("a snapshot", 0.0, np.array([2.0]), 5.0),
    ]:
        u, v, w = uvw(antennas, declination, hours)
        radius = np.sin(field_deg / 2 * RAD)
        heights = []
        for angle in (20 * RAD, 110 * RAD):
            height, shift = peak(u, v, w, radius * np.sin(angle), radius * np.cos(angle))
            heights.append((height, float(np.hypot(*shift))))
        cases.append({
            "name": name,
            "declination_deg": declination,
            "first_hour": float(hours[0]),
            "last_hour": float(hours[-1]),
            "integrations": len(hours),
            "field_deg": field_deg,
            "largest_w": float(np.max(np.abs(w))),
            "peaks": [h for h, _ in heights],
            "shifts_rad": [s for _, s in heights],
        })
    return {"latitude_deg": LATITUDE, "frequency_hz": FREQUENCY, "antennas_enu_m": [list(map(float, a)) for a in antennas], "cases": cases}


print(json.dumps(main(), indent=1))
