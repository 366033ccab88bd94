#!/usr/bin/env python3
"""Reference values for tolerance studies: writes study.json beside this file.

philox     Philox4x32-10 by code for words of any width; that code is first held against numpy.random.Philox, which is Philox4x64-10.
           Multipliers and increments: Salmon, Moraes, Dror, Shaw, "Parallel random numbers: as easy as 1, 2, 3", SC11, 2011, from memory;
           those for 64 bits are what NumPy proves.
normal     quantiles and moments of a standard normal distribution truncated at three standard deviations: scipy.stats.truncnorm.
wilson     95 % score intervals: scipy.stats.binomtest, proportion_ci "wilson".
orders     numbers of the order statistics about a quantile, from the binomial distribution of scipy.stats; each is checked by its definition.
spearman   rank correlations, with ties: scipy.stats.spearmanr of numbers in single precision.

Run: /usr/bin/python3 study.py      (some seconds)
"""
import json
import pathlib
import sys

import numpy as np
import scipy
from scipy import stats

SEED = 20240911
CONSTANTS = {
    32: ((0xD2511F53, 0xCD9E8D57), (0x9E3779B9, 0xBB67AE85)),
    64: ((0xD2E7470EE14C6C93, 0xCA5A826395121157), (0x9E3779B97F4A7C15, 0xBB67AE8584CAA73B)),
}


def philox(counter, key, width):
    multipliers, increments = CONSTANTS[width]
    mask = (1 << width) - 1
    c, k = list(counter), list(key)
    for _ in range(10):
        p0, p1 = multipliers[0] * c[0], multipliers[1] * c[2]
        c = [(p1 >> width) ^ c[1] ^ k[0], p1 & mask, (p0 >> width) ^ c[3] ^ k[1], p0 & mask]
        k = [(k[i] + increments[i]) & mask for i in range(2)]
    return c


def held_against_numpy(rng):
    for _ in range(50):
        counter = [int(x) for x in rng.integers(0, 2**64, 4, dtype=np.uint64)]
        key = [int(x) for x in rng.integers(0, 2**64, 2, dtype=np.uint64)]
        g = np.random.Philox(counter=np.array(counter, dtype=np.uint64), key=np.array(key, dtype=np.uint64))
        theirs = [int(x) for x in g.random_raw(4)]
        number = sum(w << (64 * i) for i, w in enumerate(counter)) + 1  # NumPy counts before it draws
        ours = philox([(number >> (64 * i)) & (2**64 - 1) for i in range(4)], key, 64)
        assert ours == theirs, (ours, theirs)


def philox_cases(rng):
    cases = []
    for _ in range(40):
        counter = [int(x) for x in rng.integers(0, 2**32, 4)]
        key = [int(x) for x in rng.integers(0, 2**32, 2)]
        cases.append({"counter": counter, "key": key, "words": philox(counter, key, 32)})
    return cases


def normal_cases():
    d = stats.truncnorm(-3, 3)
    u = [1e-12, 1e-6, 0.001, 0.02, 0.1, 0.25, 0.4, 0.5, 0.6, 0.75, 0.9, 0.98, 0.999, 1 - 1e-6]
    return {"quantiles": [{"u": x, "value": float(d.ppf(x))} for x in u], "variance": float(d.var()), "kurtosis": float(d.stats(moments="k"))}


def wilson_cases():
    cases = []
    for n in (1, 2, 10, 300, 1000, 10000, 100000):
        for k in sorted({0, 1, n // 10, n // 2, n - 1, n}):
            ci = stats.binomtest(k, n).proportion_ci(0.95, method="wilson")
            cases.append({"count": k, "of": n, "low": float(ci.low), "high": float(ci.high)})
    return cases


def order_cases():
    cases = []
    for n in (1, 5, 59, 100, 299, 1000, 10000, 100000):
        for p in (0.01, 0.05, 0.5, 0.95, 0.99):
            b = stats.binom(n, p)
            low, high = int(b.ppf(0.025)), int(b.ppf(0.975)) + 1
            assert low == 0 or b.cdf(low - 1) <= 0.025 < b.cdf(low)
            assert high > n or b.sf(high - 1) <= 0.025 < b.sf(high - 2)
            cases.append({"n": n, "p": p, "low": low, "high": high if high <= n else 0})
    return cases


def spearman_cases(rng):
    cases = []
    for n, slope, levels in ((5, 1, 0), (40, 0.3, 0), (40, -2, 4), (200, 0.1, 3), (500, -0.5, 0), (500, 1, 50)):
        u = rng.random(n)
        y = slope * u + rng.normal(0, 0.3, n)
        if levels:
            y = np.round(y * levels) / levels
        y = y.astype(np.float32)
        cases.append({"u": u.tolist(), "y": [float(v) for v in y], "rho": float(stats.spearmanr(u, y)[0])})
    return cases


def main():
    rng = np.random.default_rng(SEED)
    held_against_numpy(rng)
    out = {
        "script": "study.py", "seed": SEED, "python": sys.version.split()[0], "scipy": scipy.__version__, "numpy": np.__version__,
        "philox": philox_cases(rng), "normal": normal_cases(), "wilson": wilson_cases(), "orders": order_cases(),
        "spearman": spearman_cases(rng),
    }
    path = pathlib.Path(sys.argv[1]) if len(sys.argv) > 1 else pathlib.Path(__file__).with_suffix(".json")
    path.write_text(json.dumps(out, indent=1) + "\n")


if __name__ == "__main__":
    main()
