"""Writes second_opinion.csv: curves, present values and rates of return by general-purpose libraries.

    python second_opinion.py second_opinion.csv

mpmath computes at 50 digits from the doubles that the inputs are stored as; numpy sums the same vectors and gives the
roots of the polynomials from which mpmath starts. Nothing here is taken from hence.
"""

import sys

import mpmath
import numpy
from mpmath import mpf

mpmath.mp.dps = 50

BANDS = [(0.035, 30), (0.03, 75), (0.025, 125), (0.02, 200), (0.015, 300), (0.01, None)]


def flat(r):
    return lambda t: (1 + mpf(r)) ** -t


def continuous(r):
    return lambda t: mpmath.exp(-mpf(r) * t)


def chain(rates):
    """A rate for each stretch of years; the first one extends before the base."""

    def factor(t):
        if t < 0:
            return (1 + rates[0][0]) ** -t
        product, start = mpf(1), mpf(0)
        for rate, end in rates:
            stop = t if end is None else min(t, mpf(end))
            if stop > start:
                product *= (1 + rate) ** -(stop - start)
                start = stop
        return product

    return factor


def bands(pairs):
    return chain([(mpf(rate), end) for rate, end in pairs])


def stepped(pairs):
    def factor(t):
        rate = next(rate for rate, end in pairs if end is None or t <= end)
        return (1 + mpf(rate)) ** -t

    return factor


def interpolated(points):
    def rate(t):
        if t <= points[0][0]:
            return mpf(points[0][1])
        for (a, x), (b, y) in zip(points, points[1:]):
            if t <= b:
                return mpf(x) + (mpf(y) - mpf(x)) * (t - a) / (b - a)
        return mpf(points[-1][1])

    return lambda t: (1 + rate(t)) ** -t


def exact(rho, eta, growth):
    return chain([((1 + mpf(rho)) * (1 + mpf(g)) ** mpf(eta) - 1, end) for g, end in growth])


def linear(rho, eta, g):
    rate = mpf(rho) + mpf(eta) * mpf(g)
    return lambda t: (1 + rate) ** -t


def gamma(mean, sd):
    m, s = mpf(mean), mpf(sd)
    return lambda t: (1 + t * s**2 / m) ** -(m**2 / s**2)


def mixture(parts):
    return lambda t: mpmath.fsum(mpf(w) * d(t) for w, d in parts)


def uncertain(rho, eta, g, sd):
    eta, sd = mpf(eta), mpf(sd)
    rate = mpf(rho) + eta * mpf(g) - eta * (eta + 1) * sd**2 / 2
    return lambda t: (1 + rate) ** -t


def uncertain_log(rho, eta, m, sd):
    eta, sd = mpf(eta), mpf(sd)
    return lambda t: mpmath.exp(-t * (mpf(rho) + eta * mpf(m) - eta**2 * sd**2 / 2))


# Rate line, its factor, the lowest offset.
CURVES = [
    ("3.5%", flat(0.035), -40),
    ("-1.25%", flat(-0.0125), -40),
    ("100%", flat(1.0), -40),
    ("7% continuous", continuous(0.07), -40),
    ("3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after", bands(BANDS), -40),
    ("4% to 7.5, 6% to 40, 0% after", bands([(0.04, 7.5), (0.06, 40), (0.0, None)]), -40),
    (
        "4% to 10, 3% to 30, 2% after; whole horizon by flow",
        stepped([(0.04, 10), (0.03, 30), (0.02, None)]),
        0,
    ),
    (
        "3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by flow, interpolated",
        interpolated([(3, 0.039), (10, 0.04), (30, 0.042)]),
        0,
    ),
    ("preference 1.5%, elasticity 1, growth 2%", linear(0.015, 1, 0.02), -40),
    ("preference 1%, elasticity 1.35, growth 2%; exact", exact(0.01, 1.35, [(0.02, None)]), 0),
    (
        "preference 1%, elasticity 2, growth 2% to 50, -0.5% after; exact",
        exact(0.01, 2, [(0.02, 50), (-0.005, None)]),
        0,
    ),
    ("preference 1%, elasticity 2, growth 2% sd 3.6%", uncertain(0.01, 2, 0.02, 0.036), -40),
    ("preference 1%, elasticity 2, log growth 2% sd 3.6%", uncertain_log(0.01, 2, 0.02, 0.036), -40),
    ("gamma mean 4% sd 3%", gamma(0.04, 0.03), -40),
    ("gamma mean 2% sd 0.5%", gamma(0.02, 0.005), -40),
    ("0.5 of (1%), 0.5 of (7% continuous)", mixture([(0.5, flat(0.01)), (0.5, continuous(0.07))]), -40),
    (
        "0.25 of (gamma mean 4% sd 3%), 0.75 of (3% to 30, 2% after)",
        mixture([(0.25, gamma(0.04, 0.03)), (0.75, bands([(0.03, 30), (0.02, None)]))]),
        -40,
    ),
]
OFFSETS = [-40, -2, -0.5, 0.5, 1, 2.25, 7.5, 10, 10.5, 29.75, 30, 31, 50, 51.5, 75, 100, 125.5, 200, 300, 301, 999.5, 1000]


def text(x):
    """The shortest text that reads back to the nearest double."""
    return repr(float(x))


class Numbers:
    """A linear congruential generator (Knuth's MMIX constants), so that the table can be made again anywhere."""

    def __init__(self, seed):
        self.state = seed

    def below(self, n):
        self.state = (6364136223846793005 * self.state + 1442695040888963407) % 2**64
        return (self.state >> 33) % n


def vectors():
    """Flows at whole offsets from 0: outlays first, outlays at both ends, and any sign."""
    numbers = Numbers(2026)
    for k in range(30):
        years = 2 + numbers.below(60)
        amount = lambda low, high: (low + numbers.below(high - low)) / 4
        if k % 3 == 0:
            flows = [-amount(4000, 40000)] + [amount(0, 4000) for _ in range(years)]
        elif k % 3 == 1:
            flows = [-amount(4000, 20000)] + [amount(100, 4000) for _ in range(years)] + [-amount(0, 80000)]
        else:
            flows = [amount(-8000, 8000) for _ in range(years)]
        yield (-0.01, 0.0, 0.015, 0.035, 0.08, 0.25)[numbers.below(6)], flows


def net_present_value(rate, flows):
    return mpmath.fsum(mpf(x) * (1 + mpf(rate)) ** -t for t, x in enumerate(flows))


def rates_of_return(flows):
    """Every rate from -50% to 100%: real roots of the polynomial in 1/(1+r), refined to 50 digits."""
    roots = numpy.roots(list(reversed(flows)))
    near = [root.real for root in roots if abs(root.imag) < 1e-6 and 0.45 < root.real < 2.2]
    value = lambda x: mpmath.polyval([mpf(c) for c in reversed(flows)], x)
    found = []
    for start in near:
        x = mpmath.findroot(value, mpf(float(start)), tol=mpf(10) ** -60)
        rate = 1 / x - 1
        if mpf("-0.5") <= rate <= 1 and all(abs(rate - other) > mpf(10) ** -20 for other in found):
            found.append(rate)
    return sorted(found)


def rows():
    for line, factor, lowest in CURVES:
        for offset in OFFSETS:
            if offset < lowest:
                continue
            t = mpf(offset)
            d = factor(t)
            forward = ""
            if offset >= 1 and offset == int(offset):
                forward = text(factor(t - 1) / d - 1)
            yield ["curve", f'"{line}"', text(offset), text(d), forward, text(d ** (-1 / t) - 1), "", "", ""]
    for rate, flows in vectors():
        npv = net_present_value(rate, flows)
        plain = float(numpy.sum(numpy.array(flows) * (1 + rate) ** -numpy.arange(len(flows), dtype=float)))
        gross = sum(abs(x) * (1 + rate) ** -t for t, x in enumerate(flows))
        assert abs(plain - float(npv)) <= 1e-13 * gross, "numpy and mpmath agree"
        rates = " ".join(text(r) for r in rates_of_return(flows))
        yield ["flows", text(rate), "", "", "", "", text(npv), rates, " ".join(text(x) for x in flows)]


def main(path):
    with open(path, "w", encoding="utf-8", newline="\n") as out:
        out.write("# Made by second_opinion.py: mpmath at 50 digits, with numpy's roots as starting points.\n")
        out.write("# A curve at an offset in years, or flows at offsets 0, 1, 2, ... at a flat yearly rate.\n")
        out.write("what,line,offset,factor,forward_rate,mean_rate,npv,rates_of_return,flows\n")
        for row in rows():
            out.write(",".join(row) + "\n")


if __name__ == "__main__":
    main(sys.argv[1])
