"""Words of xoshiro128** computed by its published algorithm in whole-number arithmetic, and normal quantiles from SciPy.

Prints JSON. Algorithm: Blackman & Vigna 2021, Scrambled linear pseudorandom number generators, ACM TOMS 47, 36.
"""
import json

from scipy.stats import norm

MASK = 0xFFFFFFFF


def rotate(x, k):
    return ((x << k) | (x >> (32 - k))) & MASK


def words(state, count):
    s = list(state)
    out = []
    for _ in range(count):
        out.append((rotate((s[1] * 5) & MASK, 7) * 9) & MASK)
        t = (s[1] << 9) & MASK
        s[2] ^= s[0]
        s[3] ^= s[1]
        s[1] ^= s[2]
        s[0] ^= s[3]
        s[2] ^= t
        s[3] = rotate(s[3], 11)
    return out


edges = [0.0001, 0.001, 0.01, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.95, 0.99, 0.999, 0.9999]
print(json.dumps({
    "words": [
        {"state": [1, 2, 3, 4], "words": words([1, 2, 3, 4], 20)},
        {"state": [0xDEADBEEF, 0x80000000, 0xFFFFFFFF, 7], "words": words([0xDEADBEEF, 0x80000000, 0xFFFFFFFF, 7], 20)},
    ],
    "probabilities": edges,
    "normal_quantiles": [float(norm.ppf(p)) for p in edges],
}, indent=1))
