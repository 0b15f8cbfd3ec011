"""What somebody with NumPy would write to look a random-groups file over before imaging: flagged shares, medians and MADs of
the amplitude by baseline and channel, samples beyond six of them, steps of the phase, filled uv cells and the largest |w|.
One pass over the file, some hundred integrations at a time. Usage: survey.py FILE FIELD_RAD
"""
import json
import sys

import numpy as np
from astropy.io import fits

path, field = sys.argv[1], float(sys.argv[2])
with fits.open(path, memmap=True) as hdus:
    header = hdus[0].header
    start = hdus[0].fileinfo()["datLoc"]
groups, parameters = header["GCOUNT"], header["PCOUNT"]
names = [header[f"PTYPE{i}"] for i in range(1, parameters + 1)]
scale = {name: (header.get(f"PSCAL{i}", 1.0), header.get(f"PZERO{i}", 0.0)) for i, name in enumerate(names, 1)}
axes = [header[f"NAXIS{i}"] for i in range(2, header["NAXIS"] + 1)]
complexes, stokes, channels = axes[0], axes[1], axes[2]
size = int(np.prod(axes))
step = parameters + size
samples = size // complexes
data = np.memmap(path, dtype=">f4", mode="r", offset=start, shape=(groups, step))
column = {name: i for i, name in reversed(list(enumerate(names)))}


def parameter(block, *known):
    name = next(n for n in names if any(n.startswith(k) for k in known))
    factor, zero = scale[name]
    return block[:, column[name]].astype(np.float64) * factor + zero


frequency = header["CRVAL4"]
codes = data[:, column["BASELINE"]].astype(np.int32)
baselines = np.unique(codes)
rows_at_once = len(baselines) * 100
total = flagged = outlying = 0
flagged_by_channel = np.zeros(samples, np.int64)
flagged_by_antenna = np.zeros(256, np.int64)
middles, spreads, largest_step, largest_w = [], [], 0.0, 0.0
cells = np.zeros(0, np.int64)


def medians(values):
    """Of each row; NaN is larger than anything, so that flagged samples take the upper end."""
    counts = values.shape[1] - np.count_nonzero(np.isnan(values), axis=1)
    half = int(np.median(counts)) // 2
    if np.all(counts == values.shape[1]):
        return np.partition(values, half, axis=1)[:, half]
    ordered = np.sort(values, axis=1)
    return ordered[np.arange(len(ordered)), np.maximum(counts // 2, 0)]


for first in range(0, groups, rows_at_once):
    block = data[first:first + rows_at_once]
    code = codes[first:first + rows_at_once]
    values = block[:, parameters:].astype(np.float32).reshape(len(block), samples, complexes)
    vis = np.ascontiguousarray(values[..., :2]).view(np.complex64)[..., 0]
    bad = ~(values[..., 2] > 0)
    total += bad.size
    if bad.any():
        flagged += int(np.count_nonzero(bad))
        flagged_by_channel += np.count_nonzero(bad, axis=0)
        by_row = np.count_nonzero(bad, axis=1)
        flagged_by_antenna += np.bincount(code >> 8, by_row, 256).astype(np.int64) + np.bincount(code & 255, by_row, 256).astype(np.int64)
    u, v, w = (parameter(block, *k) for k in (("UU",), ("VV",), ("WW",)))
    largest_w = max(largest_w, float(np.abs(w).max()) * frequency)
    for offset in (0, channels // 2, channels - 1):
        at = frequency + (offset - header["CRPIX4"] + 1) * header["CDELT4"]
        keys = np.rint(u * at * field).astype(np.int64) * (1 << 24) + np.rint(v * at * field).astype(np.int64)
        cells = np.union1d(cells, keys)
    amplitude = np.abs(vis)
    amplitude[bad] = np.nan
    order = np.argsort(code, kind="stable")
    edges = np.append(np.searchsorted(code[order], baselines), len(order))
    for low, high in zip(edges[:-1], edges[1:]):
        rows = order[low:high]
        if len(rows) == 0:
            continue
        own = np.ascontiguousarray(amplitude[rows].T)
        middle = medians(own)
        spread = 1.4826 * medians(np.abs(own - middle[:, None]))
        outlying += int(np.count_nonzero(own > (middle + 6 * spread)[:, None]))
        middles.append(middle)
        spreads.append(spread)
        mean = vis[rows].mean(axis=1)
        if len(rows) > 1:
            largest_step = max(largest_step, float(np.abs(np.angle(mean[1:] * np.conj(mean[:-1]))).max()))
print(json.dumps({
    "samples": total, "flagged": flagged, "outlying": outlying, "cells": len(cells), "largest_w": largest_w,
    "median": float(np.nanmedian(middles)), "spread": float(np.nanmedian(spreads)), "largest_step": largest_step,
    "worst_channel": int(flagged_by_channel.argmax()), "worst_antenna": int(flagged_by_antenna.argmax()),
}))
