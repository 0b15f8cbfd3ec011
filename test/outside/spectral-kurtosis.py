"""Moments of the generalized spectral kurtosis in noise, exactly; its tails by simulation.

Powers are gamma distributed with shape N d and independent. The estimate depends on them through (sum of squares)/(sum
squared), which is independent of their sum (Lukacs 1955), so its moments are ratios of moments of independent sums.
"""
import json
from fractions import Fraction
from math import comb

import numpy as np


def rising(x, n):
    product = Fraction(1)
    for k in range(n):
        product *= x + k
    return product


def moments_of_sum(single, count, order):
    """E[(X_1 + ... + X_count)^k], k = 0..order, from those of one, by adding them one by one in doubling steps."""

    def add(a, b):
        return [sum(comb(k, j) * a[j] * b[k - j] for j in range(k + 1)) for k in range(order + 1)]

    total = [Fraction(1)] + [Fraction(0)] * order
    power = single
    while count:
        if count & 1:
            total = add(total, power)
        power = add(power, power)
        count >>= 1
    return total


def exact(count, shape):
    squares = moments_of_sum([rising(shape, 2 * k) for k in range(5)], count, 4)
    ratio = [squares[k] / rising(count * shape, 2 * k) for k in range(5)]
    a = (count * shape + 1) / Fraction(count - 1)
    # SK = a (count * ratio - 1)
    raw = [
        sum(comb(k, j) * (a * count) ** j * (-a) ** (k - j) * ratio[j] for j in range(k + 1)) for k in range(5)
    ]
    mean = raw[1]
    central = [sum(comb(k, j) * raw[j] * (-mean) ** (k - j) for j in range(k + 1)) for k in range(5)]
    variance = central[2]
    return {
        "count": count,
        "shape": float(shape),
        "mean": float(mean),
        "variance": float(variance),
        "skewness": float(central[3]) / float(variance) ** 1.5,
        "kurtosis": float(central[4] / variance**2),
    }


def simulated(count, draws, seed):
    rng = np.random.default_rng(seed)
    values = []
    for _ in range(draws // 10000):
        power = rng.exponential(size=(10000, count))
        s1, s2 = power.sum(axis=1), (power**2).sum(axis=1)
        values.append((count + 1) / (count - 1) * (count * s2 / s1**2 - 1))
    values = np.concatenate(values)
    return {
        "count": count,
        "draws": draws,
        "lower01": float(np.quantile(values, 0.01)),
        "upper01": float(np.quantile(values, 0.99)),
    }


print(
    json.dumps(
        {
            "exact": [
                exact(m, Fraction(s))
                for m, s in [(16, 1), (64, 1), (64, Fraction(1, 2)), (180, 1), (256, 1), (64, 16), (4096, 1)]
            ],
            "simulated": [simulated(64, 400000, 1), simulated(180, 400000, 2)],
        }
    )
)
