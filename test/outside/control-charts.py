"""Normal quantiles by SciPy, and run lengths of control charts by drawing nights. Prints JSON."""
import json

import numpy as np
from scipy.stats import norm

shares = [1e-9, 1e-4, 0.0125, 0.3, 0.5, 0.6, 0.975, 0.9999]


def run_length(chart, rng, runs):
    """Mean number of nights to the first alarm when nothing changes."""
    alive, lengths, night, state = np.arange(runs), np.zeros(runs), 0, chart(None, None, runs)
    while len(alive):
        night += 1
        state, alarm = chart(state, rng.standard_normal(len(alive)), len(alive))
        lengths[alive[alarm]] = night
        alive, state = alive[~alarm], state[:, ~alarm]
    return float(lengths.mean()), float(lengths.std() / np.sqrt(runs))


def cusum(limit):
    def step(state, x, count):
        if state is None:
            return np.zeros((2, count))
        state = np.maximum(0, np.stack([state[0] + x - 0.5, state[1] - x - 0.5]))
        return state, state.max(axis=0) > limit
    return step


def ewma(limit, weight=0.1):
    edge = limit * np.sqrt(weight / (2 - weight))
    def step(state, x, count):
        if state is None:
            return np.zeros((1, count))
        state = state + weight * (x - state)
        return state, np.abs(state[0]) > edge
    return step


rng = np.random.default_rng(11)
print(json.dumps({
    "shares": shares,
    "quantiles": [float(norm.ppf(p)) for p in shares],
    "cusum": [{"limit": h, "nights": n, "error": e} for h in (3.0, 4.0) for n, e in [run_length(cusum(h), rng, 20000)]],
    "ewma": [{"limit": h, "nights": n, "error": e} for h in (2.0, 2.5) for n, e in [run_length(ewma(h), rng, 20000)]],
}, indent=1))
