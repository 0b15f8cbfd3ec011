"""Dirty beams of an invented array by direct sums in NumPy: no grid, no transform. Weights are made sample by sample, by
counting in a dictionary of cells. Prints JSON.
"""
import json

import numpy as np
from scipy.optimize import brentq, minimize

C = 299792458.0
RAD = np.pi / 180

ANTENNAS = [
    [0, 0, 0], [40, 25, 1], [-60, 80, 0.5], [150, -110, -1], [-230, -40, 2], [90, 310, 0], [420, 180, 1.5],
    [-380, 350, -2], [-510, -420, 0], [260, -640, 1], [820, -150, 0.5], [130, 790, -1],
]
LATITUDE, DECLINATION = 34.0, 21.0
HOURS = np.linspace(-2.0, 2.5, 19)
FREQUENCIES = [1.400e9, 1.412e9, 1.424e9]
FIELD = 1500 * RAD / 3600


def samples():
    f, d = LATITUDE * RAD, DECLINATION * RAD
    enu = np.array(ANTENNAS, dtype=float)
    xyz = np.stack([-np.sin(f) * enu[:, 1] + np.cos(f) * enu[:, 2], enu[:, 0], np.cos(f) * enu[:, 1] + np.sin(f) * enu[:, 2]], 1)
    u, v, weight = [], [], []
    for t, hour in enumerate(HOURS * 15 * RAD):
        for i in range(len(xyz)):
            for j in range(i + 1, len(xyz)):
                x, y, z = xyz[i] - xyz[j]
                uu = np.sin(hour) * x + np.cos(hour) * y
                vv = -np.sin(d) * np.cos(hour) * x + np.sin(d) * np.sin(hour) * y + np.cos(d) * z
                for c, frequency in enumerate(FREQUENCIES):
                    u.append(uu * frequency / C)
                    v.append(vv * frequency / C)
                    # Weights that differ from sample to sample, and one antenna that is flagged for a third of the time.
                    flagged = 4 in (i, j) and t % 3 == 0
                    weight.append(0.0 if flagged else 2.0 + ((i + 1) * (j + 1) + t + c) % 4)
    u, v, weight = map(np.array, (u, v, weight))
    return u[weight > 0], v[weight > 0], weight[weight > 0]


def density(u, v, weight):
    """Weight in the cell of each sample, conjugates included."""
    cells = {}
    key = lambda a, b: (int(np.floor(a * FIELD + 0.5)), int(np.floor(b * FIELD + 0.5)))
    for a, b, w in zip(u, v, weight):
        for sign in (1, -1):
            cells[key(sign * a, sign * b)] = cells.get(key(sign * a, sign * b), 0.0) + w
    return np.array([cells[key(a, b)] for a, b in zip(u, v)]), np.array(list(cells.values()))


def imaging(u, v, weight, kind):
    if kind == "natural":
        return weight
    own, cells = density(u, v, weight)
    if kind == "uniform":
        return weight / own
    f2 = (5 * 10.0**-kind) ** 2 / (np.sum(cells**2) / (2 * np.sum(weight)))
    return weight / (1 + own * f2)


def describe(u, v, weight, kind):
    t = imaging(u, v, weight, kind)
    beam = lambda l, m: float(np.sum(t * np.cos(2 * np.pi * (u * l + v * m))) / np.sum(t))
    # Half widths along directions, north through east, and the ellipse through them.
    angles = np.arange(24) * np.pi / 24
    step = 0.02 / np.max(np.hypot(u, v))
    radii = []
    for angle in angles:
        along = lambda r: beam(r * np.sin(angle), r * np.cos(angle)) - 0.5
        r = step
        while along(r) > 0:
            r += step
        radii.append(brentq(along, r - step, r, xtol=1e-14))
    radii = np.array(radii)
    rows = np.stack([np.cos(angles) ** 2, np.sin(2 * angles), np.sin(angles) ** 2], 1)
    mm, lm, ll = np.linalg.lstsq(rows, 1 / radii**2, rcond=None)[0]
    values, vectors = np.linalg.eigh([[ll, lm], [lm, mm]])
    pa = np.degrees(np.arctan2(vectors[0, 0], vectors[1, 0]))
    pa = pa - 180 * np.round(pa / 180)
    # Worst sidelobe: the best of many starts, outside 1.5 half widths.
    l, m = np.meshgrid(np.arange(-60, 61), np.arange(0, 61))
    pixel = FIELD / 120
    inside = (np.hypot(l, m) * pixel <= FIELD / 2)
    grid = np.zeros(l.shape)
    for row in range(l.shape[0]):
        phase = 2 * np.pi * pixel * (np.outer(l[row], u) + np.outer(m[row], v))
        grid[row] = np.cos(phase) @ t / np.sum(t)
    form = (ll * l**2 + 2 * lm * l * m + mm * m**2) * pixel**2
    side = np.where(inside & (form > 1.5**2), np.abs(grid), 0)
    worst = (0, 0, 0)
    for at in np.argsort(side.ravel())[::-1][:16]:
        start = np.array([l.ravel()[at], m.ravel()[at]]) * pixel
        sign = np.sign(beam(*start))
        found = minimize(lambda p: -sign * beam(p[0] / 1e5, p[1] / 1e5), start * 1e5, method="Nelder-Mead", options={"xatol": 1e-7, "fatol": 1e-10})
        place = found.x / 1e5
        shape = ll * place[0] ** 2 + 2 * lm * place[0] * place[1] + mm * place[1] ** 2
        if abs(found.fun) > abs(worst[0]) and shape > 1.5**2 and np.hypot(*place) <= FIELD / 2:
            worst = (beam(*place), float(place[0]), float(place[1]))
    outside = inside & (form > 2.0**2)
    outside[0] &= l[0] >= 0
    places = [(0.0, 0.0), (0.0011, 0.0), (-0.0004, 0.0023), (0.002, 0.002), (-0.0036, 0.0), (0.0012, -0.0033)]
    sigma2 = 1 / weight
    return {
        "major_rad": float(2 / np.sqrt(values[0])),
        "minor_rad": float(2 / np.sqrt(values[1])),
        "position_angle_deg": float(pa),
        "peak_sidelobe": worst[0],
        "rms_sidelobe": float(np.sqrt(np.mean(grid[outside] ** 2))),
        "noise_jy": float(np.sqrt(np.sum(t**2 * sigma2)) / np.sum(t)),
        "values": [{"l_rad": a, "m_rad": b, "beam": beam(a, b)} for a, b in places],
    }


def main():
    u, v, weight = samples()
    return {
        "array": {
            "antennas_enu_m": ANTENNAS,
            "latitude_deg": LATITUDE,
            "declination_deg": DECLINATION,
            "first_hour": float(HOURS[0]),
            "last_hour": float(HOURS[-1]),
            "integrations": len(HOURS),
            "frequencies_hz": FREQUENCIES,
            "field_rad": FIELD,
        },
        "natural": describe(u, v, weight, "natural"),
        "uniform": describe(u, v, weight, "uniform"),
        "robust": describe(u, v, weight, 0.0),
    }


print(json.dumps(main(), indent=1))
