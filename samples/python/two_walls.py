# Weighs two flood walls where the discount rate is uncertain, calling hence from Python. The town of Wrenmouth is invented.
#
# From the root of the repository, with numpy installed:
#
#     cargo build --release -p hence-ffi
#     LD_LIBRARY_PATH=target/release python3 samples/python/two_walls.py

import sys

import numpy as np

import hence

NAMES = ["the low wall", "the high wall"]
PERCENTILES = [5, 50, 95]

# Consumption a head in thousand crowns, the last ten years.
SERIES = [21.0, 21.4, 21.3, 21.9, 22.4, 22.6, 22.5, 23.1, 23.6, 23.9]


def show(what, x):
    """The bits stand beside each number, so that two runs can be compared to the last one."""
    print(f"{what:<44}{x:14.6f}  {np.float64(x).view(np.uint64):016x}")


def weigh():
    # Million crowns a year: the high wall costs more, and avoids more as the sea rises. An option a row.
    years = np.arange(101.0)
    flows = np.stack([np.full_like(years, 1.25), 1.25 + 0.0625 * years])
    flows[:, 0] = [-28.0, -70.0]
    consumption = 600.0 + 9.0 * years

    # Where the parts of the rate come from.
    growth = hence.growth(SERIES)
    show("growth along the trend", growth.trend_growth)
    show("standard error of log growth", growth.trend_error)
    show("standard deviation from year to year", growth.sd)
    show("hazard of a flood that ends the town", hence.hazard_from_waiting_time(500))

    # The parts as distributions. The same seed gives the same draws everywhere.
    _, values = hence.draws_value(
        "uniform 0% to 1%", "triangular 1, 1.5, 2", "normal mean 1.5% sd 0.4%", years, flows, 10_000, seed=7,
        hazard="every 500 years", threads=2,
    )
    first, _ = hence.draws_rank(values)
    for name, drawn, chance in zip(NAMES, values, first):
        spread, found = hence.draws_spread(drawn, PERCENTILES)
        show(f"mean of {name}", spread.mean)
        for percentile, value in zip(PERCENTILES, found):
            show(f"percentile {percentile} of {name}", value)
        show(f"chance to be worth it of {name}", spread.positive)
        show(f"chance to be first of {name}", chance)

    # Where the two swap: what the high wall gives more is worth nothing.
    more = flows[1] - flows[0]
    with hence.Basis("preference 0.5%, hazard 0.2%, elasticity 1.5, growth 1.5%") as basis:
        for parameter, words in enumerate(["rate", "preference", "elasticity", "growth"]):
            lowest, highest = (0, 20) if parameter == hence.ELASTICITY else (-0.5, 1)
            for at in basis.switching_values(parameter, years, more, lowest, highest):
                show(f"the walls swap at this {words}", at)

    # The wall is not small against what the town consumes.
    factors = hence.welfare_factors(consumption, years, consumption[0], 0.007, 1.5)
    exact = hence.equivalent_variation(flows[1], consumption, factors, consumption[0], 1.5)
    show(f"exact value of {NAMES[1]}", exact)

    # A text that is no distribution is refused, with the place of the slip.
    try:
        hence.draws_value("uniform 0% to 1%", "1.5", "normal mean 1,5% sd 0.4%", years, flows, 10_000, seed=7)
    except hence.HenceError as error:
        name = str(error).split(":")[0]
        print(f"refused: {name} (argument {error.argument}, index {error.index})")


if __name__ == "__main__":
    try:
        weigh()
    except hence.HenceError as error:
        sys.exit(f"{error} (argument {error.argument}, index {error.index})")
