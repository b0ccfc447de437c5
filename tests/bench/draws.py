"""The benchmark "draws" in vectorised numpy: the same draws, values, percentiles and probabilities.

Called by the benchmark: draws.py DRAWS YEARS RUNS, the flows of one option a line on standard input, its streams one after
the other. Prints for each way of valuing them its name, the best time in seconds, and for each option the mean, the
share of values above 0 and the share of draws in which it is first.
"""

import sys
import time

import numpy as np

DRAWS, YEARS, RUNS = map(int, sys.argv[1:4])
FLOWS = [np.array(line.split(), dtype=float).reshape(-1, YEARS + 1) for line in sys.stdin]


def by_factors(rate, net):
    """A table of factors, a row a draw, times the flows."""
    return np.exp(np.outer(np.log1p(rate), -np.arange(YEARS + 1.0))) @ net.T


def by_powers(rate, net):
    """The same with powers, as the formula is written."""
    return (1 + rate)[:, None] ** -np.arange(YEARS + 1.0) @ net.T


def by_horner(rate, net):
    """Horner's rule, a year of all draws at a time, in place."""
    v = 1 / (1 + rate)
    values = np.zeros((len(net), len(v)))
    for year in net.T[::-1]:
        values *= v
        values += year[:, None]
    return values.T


def draw(value):
    random = np.random.default_rng(1)
    preference = random.normal(0.01, 0.002, DRAWS)
    elasticity = random.normal(1.5, 0.2, DRAWS)
    growth = random.normal(0.015, 0.003, DRAWS)
    rate = preference + 0.005 + elasticity * growth
    assert ((rate > -0.5) & (rate <= 1)).all()
    net = np.array([streams.sum(axis=0) for streams in FLOWS])
    values = value(rate, net)
    best = values.max(axis=1)
    level = values == best[:, None]
    alone = level & (level.sum(axis=1) == 1)[:, None]
    mean, sd = values.mean(axis=0), values.std(axis=0, ddof=1)
    for drawn in (rate, values):
        np.percentile(drawn, [5, 25, 50, 75, 95], axis=0)
    rate.mean(), rate.std(ddof=1)
    positive, first = (values > 0).mean(axis=0), alone.mean(axis=0)
    for share in (positive, first):
        np.sqrt(share * (1 - share) / DRAWS)
    sd / np.sqrt(DRAWS)
    return [number for option in zip(mean, positive, first) for number in option]


for name, value in [
    ("factors by powers", by_powers),
    ("factors by exponentials", by_factors),
    ("Horner's rule a year at a time", by_horner),
]:
    times = []
    for _ in range(RUNS):
        start = time.perf_counter()
        numbers = draw(value)
        times.append(time.perf_counter() - start)
    print(f"numpy {np.__version__}, {name}", min(times), *map(float, numbers), sep="\t")
