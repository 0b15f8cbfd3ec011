"""Peak over off-source rms of a point source with phase errors, by images summed directly in NumPy: one snapshot of
antennas at random, and an invented array that turns with the Earth. Prints JSON.
"""
import json

import numpy as np

C = 299792458.0
RAD = np.pi / 180
ANTENNAS = [
    [0, 0, 0], [40, 25, 1], [-60, 80, 0.5], [150, -110, -1], [-230, -40, 2], [90, 310, 0], [420, 180, 1.5],
    [-380, 350, -2], [-510, -420, 0], [260, -640, 1], [820, -150, 0.5], [130, 790, -1],
]
LATITUDE, DECLINATION, FREQUENCY, FIELD = 34.0, 21.0, 1.4e9, 1500 * RAD / 3600
HOURS = np.linspace(-2.0, 2.5, 40)


def off_source(u, v, t, error, rng, field):
    """rms over the field of the image of the error alone, of the peak."""
    l, m = rng.uniform(-field / 2, field / 2, (2, 4000))
    image = np.zeros(len(l))
    for k in np.nonzero(error)[0]:
        image += t[k] * (np.exp(1j * error[k]) * np.exp(2j * np.pi * (u[k] * l + v[k] * m)) - np.exp(2j * np.pi * (u[k] * l + v[k] * m))).real
    return float(np.sqrt(np.mean(image**2)) / np.sum(t))


def snapshot():
    """Mean over many snapshots: N antennas at random, small errors."""
    rng = np.random.default_rng(3)
    n, phi = 27, 0.05
    i, j = np.triu_indices(n, 1)
    sums = {"baseline": [], "antenna": [], "baselines": [], "antennas": []}
    for _ in range(60):
        x, y = rng.normal(0, 2000, (2, n))
        u, v = x[i] - x[j], y[i] - y[j]
        antenna = np.zeros(n)
        antenna[0] = phi
        each = phi * rng.normal(size=n)
        errors = {
            "baseline": np.where(np.arange(len(i)) == 5, phi, 0.0),
            "antenna": antenna[i] - antenna[j],
            "baselines": phi * rng.normal(size=len(i)),
            "antennas": each[i] - each[j],
        }
        l, m = rng.uniform(-0.02, 0.02, (2, 400))
        wave = np.exp(2j * np.pi * (np.outer(l, u) + np.outer(m, v)))
        for name, error in errors.items():
            image = (wave @ (np.exp(1j * error) - 1)).real / len(i)
            sums[name].append(np.mean(image**2))
    return {"antennas": n, "error_rad": phi, "dynamic_range": {name: float(1 / np.sqrt(np.mean(v))) for name, v in sums.items()}}


def rotating():
    rng = np.random.default_rng(4)
    f, d = LATITUDE * RAD, DECLINATION * RAD
    enu = np.array(ANTENNAS, dtype=float)
    xyz = np.stack([-np.sin(f) * enu[:, 1] + np.cos(f) * enu[:, 2], enu[:, 0], np.cos(f) * enu[:, 1] + np.sin(f) * enu[:, 2]], 1)
    rows = []
    for t, hour in enumerate(HOURS * 15 * RAD):
        for a in range(len(xyz)):
            for b in range(a + 1, len(xyz)):
                x, y, z = xyz[a] - xyz[b]
                u = np.sin(hour) * x + np.cos(hour) * y
                v = -np.sin(d) * np.cos(hour) * x + np.sin(d) * np.sin(hour) * y + np.cos(d) * z
                rows.append((a + 1, b + 1, t, u * FREQUENCY / C, v * FREQUENCY / C))
    a, b, t, u, v = map(np.array, zip(*rows))
    weight = np.ones(len(u))
    cases = []
    for name, first, last, degrees, which in [
        ("antenna 5 for the second half", 20, 39, 20.0, (a == 5) | (b == 5)),
        ("antenna 11 throughout", 0, 39, 10.0, (a == 11) | (b == 11)),
        ("baseline 3-9 for a quarter", 10, 19, 30.0, (a == 3) & (b == 9)),
    ]:
        sign = np.where(b == (5 if "5" in name else 11), -1.0, 1.0)
        error = np.where(which & (t >= first) & (t <= last), degrees * RAD * sign, 0.0)
        cases.append({
            "name": name,
            "first_integration": first,
            "last_integration": last,
            "degrees": degrees,
            "dynamic_range": 1 / off_source(u, v, weight, error, rng, FIELD),
        })
    return {
        "antennas_enu_m": ANTENNAS,
        "latitude_deg": LATITUDE,
        "declination_deg": DECLINATION,
        "frequency_hz": FREQUENCY,
        "field_rad": FIELD,
        "first_hour": float(HOURS[0]),
        "last_hour": float(HOURS[-1]),
        "integrations": len(HOURS),
        "cases": cases,
    }


print(json.dumps({"snapshot": snapshot(), "rotating": rotating()}, indent=1))
