"""SumThreshold by its definition, run by run, in NumPy; normal scores of exponential powers by SciPy.

Offringa et al. 2010, MNRAS 405, 155: windows of 1, 2, 4, ...; a run is marked when the mean of its samples exceeds
chi_1 / 1.5^log2(N); samples marked by shorter windows are left out of sum and count; marks of one window length, in
both directions, count from the next length on. One-sided, as for powers.
"""
import json

import numpy as np
from scipy.stats import norm

RATIO = 1.5


def sum_threshold(scores, missing, first, longest_time, longest_frequency):
    rows, columns = scores.shape
    marked = np.zeros(scores.shape, dtype=bool)
    length = 1
    while length <= max(rows, columns):
        threshold = first / RATIO ** np.log2(length)
        good = ~marked & ~missing
        fresh = np.zeros(scores.shape, dtype=bool)
        if length <= min(rows, longest_time):
            for column in range(columns):
                for top in range(rows - length + 1):
                    run = slice(top, top + length)
                    inside = good[run, column]
                    if inside.any() and scores[run, column][inside].sum() > threshold * inside.sum():
                        fresh[run, column] = True
        if 1 < length <= min(columns, longest_frequency):
            for row in range(rows):
                for left in range(columns - length + 1):
                    run = slice(left, left + length)
                    inside = good[row, run]
                    if inside.any() and scores[row, run][inside].sum() > threshold * inside.sum():
                        fresh[row, run] = True
        marked |= fresh & ~missing
        length *= 2
    return marked


def plane(seed, rows, columns, first, longest_time, longest_frequency):
    rng = np.random.default_rng(seed)
    scores = rng.standard_normal((rows, columns))
    # A faint channel, a faint burst over channels, a bright sample, a block.
    scores[:, 3] += 1.6
    scores[5, :] += 1.4
    scores[rows // 2, columns // 2] += 9
    scores[10:16, 6:10] += 2.5
    missing = rng.random((rows, columns)) < 0.05
    scores = np.round(scores, 3)
    marked = sum_threshold(scores, missing, first, longest_time, longest_frequency)
    return {
        "rows": rows,
        "columns": columns,
        "first": first,
        "longestTime": longest_time,
        "longestFrequency": longest_frequency,
        "scores": scores.ravel().tolist(),
        "missing": np.flatnonzero(missing).tolist(),
        "marked": np.flatnonzero(marked).tolist(),
    }


powers = [0.001, 0.05, 0.3, 0.6931, 1.0, 2.0, 3.0, 5.0, 8.0, 12.5, 20.0, 32.0]
print(
    json.dumps(
        {
            "planes": [
                plane(7, 40, 12, 6.0, 64, 64),
                plane(8, 24, 33, 5.0, 16, 8),
                plane(9, 70, 14, 4.5, 64, 16),
            ],
            "powers": powers,
            "scores": [float(norm.isf(np.exp(-p))) for p in powers],
        }
    )
)
