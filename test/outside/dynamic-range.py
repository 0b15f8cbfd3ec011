"""Peak over rms over the field of a point source with errors, by images summed directly in NumPy: one snapshot of
antennas at random, an invented array that turns with the Earth, and sources at the edge of a field that suffer from w and
from averaging. Prints JSON.
"""
import json

import numpy as np
from scipy.optimize import minimize

C = 299792458.0
RAD = np.pi / 180
ANTENNAS = [
    [0, 0, 0], [40, 25, 1], [-60, 80, 0.5], [150, -110, -1], [-230, -40, 2], [90, 310, 0], [420, 180, 1.5],
    [-380, 350, -2], [-510, -420, 0], [260, -640, 1], [820, -150, 0.5], [130, 790, -1],
]
LATITUDE, DECLINATION, FREQUENCY, FIELD = 34.0, 21.0, 1.4e9, 1500 * RAD / 3600
CHANNEL_WIDTH = 4e6
HOURS = (-2.0, 2.5)
INTEGRATIONS = 40
# rad/s, IERS Conventions 2010, chapter 1
EARTH = 7.292115e-5


def rms(u, v, t, error, field):
    """(samples) or (samples x realizations) complex error of a visibility of 1: rms over the field, of the peak."""
    error = error.reshape(len(u), -1)
    touched = np.any(error != 0, axis=1)
    u, v, weighted = u[touched], v[touched], (t[:, None] * error)[touched]
    # More places along each side than the image has fringes.
    count = int(2.4 * field * max(np.abs(u).max(), np.abs(v).max())) + 16
    at = ((np.arange(count) + 0.5) / count - 0.5) * field
    across, along = (np.exp(2j * np.pi * np.outer(at, spacing)) for spacing in (u, v))
    squares = [np.mean(((across * one) @ along.T).real ** 2) for one in weighted.T]
    return float(np.sqrt(np.mean(squares)) / np.sum(t))


def snapshot():
    """Mean over many snapshots: N antennas at random, small errors."""
    rng = np.random.default_rng(3)
    n, phi = 27, 0.05
    i, j = np.triu_indices(n, 1)
    sums = {"baseline": [], "antenna": [], "baselines": [], "antennas": []}
    for _ in range(400):
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
        l, m = rng.uniform(-0.05, 0.05, (2, 100))
        wave = np.exp(2j * np.pi * (np.outer(l, u) + np.outer(m, v)))
        for name, error in errors.items():
            image = (wave @ (np.exp(1j * error) - 1)).real / len(i)
            sums[name].append(np.mean(image**2))
    return {"antennas": n, "error_rad": phi, "dynamic_range": {name: float(1 / np.sqrt(np.mean(v))) for name, v in sums.items()}}


def project(xyz, hour):
    d = DECLINATION * RAD
    x, y, z = xyz
    u = np.sin(hour) * x + np.cos(hour) * y
    v = -np.sin(d) * np.cos(hour) * x + np.sin(d) * np.sin(hour) * y + np.cos(d) * z
    w = np.cos(d) * np.cos(hour) * x - np.cos(d) * np.sin(hour) * y + np.sin(d) * z
    return u, v, w


def observe(channels):
    """First and second antenna, integration, channel, baseline in the equatorial frame, metres, and hour angle."""
    f = LATITUDE * RAD
    enu = np.array(ANTENNAS, dtype=float)
    xyz = np.stack([-np.sin(f) * enu[:, 1] + np.cos(f) * enu[:, 2], enu[:, 0], np.cos(f) * enu[:, 1] + np.sin(f) * enu[:, 2]], 1)
    a, b = np.triu_indices(len(xyz), 1)
    hours = np.linspace(*HOURS, INTEGRATIONS) * 15 * RAD
    t, k, c = (g.ravel() for g in np.meshgrid(np.arange(INTEGRATIONS), np.arange(len(a)), np.arange(channels), indexing="ij"))
    return a[k] + 1, b[k] + 1, t, c, (xyz[a] - xyz[b])[k].T, hours[t]


def uniform_weights(u, v, field):
    """One over the samples in each cell of 1/field, conjugates counted."""
    keys = np.stack([np.floor(u * field + 0.5), np.floor(v * field + 0.5)], 1)
    mirror = np.stack([np.floor(-u * field + 0.5), np.floor(-v * field + 0.5)], 1)
    cells, count = np.unique(np.concatenate([keys, mirror]), axis=0, return_counts=True)
    at = {tuple(cell): n for cell, n in zip(cells, count)}
    return np.array([1 / at[tuple(key)] for key in keys])


def rotating():
    rng = np.random.default_rng(4)
    cases = []

    def case(name, first, last, weighting="natural", channels=1, antenna=None, degrees=0.0, gain=1.0, delay=0.0, noise=0.0, event=None, size=None, unit="deg"):
        a, b, t, c, xyz, hour = observe(channels)
        frequency = FREQUENCY + c * CHANNEL_WIDTH
        u, v, _ = (part * frequency / C for part in project(xyz, hour))
        touched = (t >= first) & (t <= last) & (((a == 3) & (b == 9)) if antenna is None else ((a == antenna) | (b == antenna)))
        sign = np.where(b == antenna, -1.0, 1.0)
        phase = degrees * RAD + 2 * np.pi * delay * (frequency - frequency.mean())
        error = np.where(touched, gain * np.exp(1j * phase * sign) - 1, 0)
        if noise > 0:
            error = np.where(touched[:, None], np.exp(1j * noise * RAD * rng.normal(size=(len(u), 60))) - 1, 0)
        weight = uniform_weights(u, v, FIELD) if weighting == "uniform" else np.ones(len(u))
        cases.append({
            "name": name, "first_integration": first, "last_integration": last, "weighting": weighting, "channels": channels,
            "antenna": antenna, "event": event, "size": size, "unit": unit, "samples": int(np.sum(touched)),
            "dynamic_range": 1 / rms(u, v, weight, error, FIELD),
        })

    case("antenna 5 turned for the second half", 20, 39, antenna=5, degrees=20.0, event="phase-jump", size=20)
    case("antenna 11 turned throughout", 0, 39, antenna=11, degrees=10.0, event="phase-jump", size=10)
    case("antenna 6, amid the array, turned throughout", 0, 39, antenna=6, degrees=10.0, event="phase-jump", size=10)
    case("antenna 1, at the centre, turned for a quarter", 10, 19, antenna=1, degrees=30.0, event="phase-jump", size=30)
    case("the same, uniform weights", 10, 19, "uniform", antenna=1, degrees=30.0, event="phase-jump", size=30)
    case("antenna 6 turned by half a turn", 5, 20, antenna=6, degrees=180.0, event="half-turn", size=180)
    case("baseline 3-9 turned for a quarter", 10, 19, degrees=30.0, event="closure", size=30)
    case("antenna 4 with a gain of 1.2", 0, 39, antenna=4, gain=1.2, event="gain-step", size=1.2, unit="ratio")
    case("antenna 9 silent", 0, 39, antenna=9, gain=0.0, event="silent-antenna", size=0, unit="ratio")
    case("antenna 2 silent for a while, uniform weights", 3, 17, "uniform", antenna=2, gain=0.0, event="silent-antenna", size=0, unit="ratio")
    case("antenna 6 with a delay of 12 ns", 0, 39, channels=8, antenna=6, delay=12e-9, event="delay-slope", size=12, unit="ns")
    case("antenna 12 with a delay of 60 ns for a half", 0, 19, channels=8, antenna=12, delay=60e-9, event="delay-slope", size=60, unit="ns")
    case("antenna 6 with phases of its own", 0, 39, antenna=6, noise=20.0, event="phase-noise", size=20)
    case("antenna 3 with phases of its own, uniform weights", 0, 39, "uniform", antenna=3, noise=20.0, event="phase-noise", size=20)
    return cases


def edge_of_field():
    """A source at the edge of the field: what is left around it, of its peak, within a field's width."""
    a, b, t, c, xyz, hour = observe(1)
    u, v, w = (part * FREQUENCY / C for part in project(xyz, hour))
    weight = np.ones(len(u))
    results = []
    for field in (0.025, 0.04):
        depth = 1 - np.sqrt(1 - np.sin(field / 2) ** 2)
        peak = lambda at: -np.mean(np.cos(2 * np.pi * (w * depth - u * at[0] * 1e-5 - v * at[1] * 1e-5)))
        # From where a plane through (u, v, w) puts it.
        slope = np.linalg.lstsq(np.stack([u, v], 1), w, rcond=None)[0]
        best = minimize(peak, slope * depth * 1e5, method="Nelder-Mead", options={"xatol": 1e-4, "fatol": 1e-10}).x * 1e-5
        error = np.exp(2j * np.pi * (w * depth - u * best[0] - v * best[1])) - 1
        results.append({"field_rad": field, "cause": "w-term", "dynamic_range": 1 / rms(u, v, weight, error, field)})
    nodes, part = np.polynomial.legendre.leggauss(9)
    for field, width, seconds in ((0.02, 5e6, 30.0), (0.03, 1e6, 90.0)):
        radius = np.sin(field / 2)
        losses = []
        for k in range(8):
            l, m = radius * np.sin(np.pi * k / 8), radius * np.cos(np.pi * k / 8)
            kept = np.zeros(len(u), complex)
            for x, gx in zip(nodes, part):
                uu, vv, ww = project(xyz, hour + x * seconds / 2 * EARTH)
                turns = uu * l + vv * m + ww * (np.sqrt(1 - l * l - m * m) - 1)
                at = [turns * (FREQUENCY + y * width / 2) / C for y in nodes]
                kept += gx / 2 * sum(gy / 2 * np.exp(2j * np.pi * phase) for phase, gy in zip(at, part))
            uu, vv, ww = project(xyz, hour)
            middle = (uu * l + vv * m + ww * (np.sqrt(1 - l * l - m * m) - 1)) * FREQUENCY / C
            losses.append(kept * np.exp(-2j * np.pi * middle))
        worst = min(losses, key=lambda kept: np.mean(kept.real))
        results.append({
            "field_rad": field, "cause": "smearing", "channel_width_hz": width, "integration_s": seconds,
            "dynamic_range": 1 / rms(u, v, weight, worst - 1, field),
        })
    return results


print(json.dumps({
    "snapshot": snapshot(),
    "array": {
        "antennas_enu_m": ANTENNAS, "latitude_deg": LATITUDE, "declination_deg": DECLINATION, "frequency_hz": FREQUENCY,
        "channel_width_hz": CHANNEL_WIDTH, "field_rad": FIELD, "first_hour": HOURS[0], "last_hour": HOURS[1], "integrations": INTEGRATIONS,
    },
    "rotating": rotating(),
    "edge": edge_of_field(),
}, indent=1))
