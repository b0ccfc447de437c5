"""The benchmark "arrays" in numpy: a million powers, the product of two arrays of 10 million, and how exact factors are.

Called by the benchmark: arrays.py RATE OFFSETS FLOWS RUNS, some offsets with the factors that hence found on standard
input. Prints three lines: seconds of the processor for the powers; for the product; the worst errors of hence and of numpy at
those offsets, in units in the last place, against decimal arithmetic of 50 digits.
"""

import math
import sys
import time
from decimal import Decimal, getcontext

import numpy as np

RATE = float(sys.argv[1])
OFFSETS, FLOWS, RUNS = map(int, sys.argv[2:5])
SAMPLE = [tuple(map(float, line.split())) for line in sys.stdin]


def best(work):
    times = []
    for _ in range(RUNS):
        start = time.process_time()
        work()
        times.append(time.process_time() - start)
    return min(times)


def worst(factors):
    getcontext().prec = 50
    base = (1 + Decimal(RATE)).ln()
    errors = []
    for (t, _), factor in zip(SAMPLE, factors):
        exact = (-Decimal(t) * base).exp()
        errors.append(abs(Decimal(float(factor)) - exact) / Decimal(math.ulp(float(exact))))
    return float(max(errors))


t = 300 * (np.arange(OFFSETS) + 0.5) / OFFSETS
print(best(lambda: np.power(1 + RATE, -t)))
factors, flows = np.random.default_rng(1).random((2, FLOWS))
print(best(lambda: np.dot(factors, flows)))
at = np.array([t for t, _ in SAMPLE])
print(worst([factor for _, factor in SAMPLE]), worst(np.power(1 + RATE, -at)), np.__version__)
