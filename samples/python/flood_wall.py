# Values a flood wall over a hundred years, calling hence from Python. The town of Wrenmouth is invented.
#
# From the root of the repository, with numpy installed:
#
#     cargo build --release -p hence-ffi
#     LD_LIBRARY_PATH=target/release python3 samples/python/flood_wall.py
#
# Another rate line or schedule and another timing may follow: "3.5% to 30, 3% after" "flows end".

import sys

import numpy as np

import hence

NAMES = ["building", "upkeep", "avoided damage"]


def show(what, x):
    """The bits stand beside each number, so that two runs can be compared to the last one."""
    print(f"{what:<34}{x:14.6f}  {np.float64(x).view(np.uint64):016x}")


def value_the_wall(curve, timing):
    table = np.loadtxt("samples/flood-wall.csv", delimiter=",", skiprows=1)
    # A column of a table has gaps in memory. Turned round once, each stream is a row without gaps, and every call
    # below passes these arrays as they are.
    table = np.ascontiguousarray(table.T)
    years, flows = table[0], table[1:]

    # The timing is part of the basis, so that the printed line says all that repeats the values.
    with hence.Basis(f"{curve}; {timing}") as basis:
        print("basis:", basis.line())
        print("in words:", basis.words())

        # The first year of the file is the base: its flows stand half a year before the year's end.
        offsets = hence.offsets_from_years(years, years[0], timing)
        factors = basis.factors(offsets)
        rates = basis.forward_rates(offsets)
        for i in range(0, years.size, 25):
            show(f"offset in {years[i]:.0f}", offsets[i])
            show(f"factor in {years[i]:.0f}", factors[i])
            show(f"forward rate in {years[i]:.0f}", rates[i])

        for name, value in zip(NAMES, basis.present_values(offsets, flows)):
            show(f"present value of {name}", value)
        net = flows.sum(axis=0)
        npv = basis.present_values(offsets, net)[0]
        show("net present value", npv)
        show("the same every year", basis.annual_equivalent(npv, years.size - 1))

        # The wall is rebuilt in the last year: flows that change their sign twice can have two rates of return.
        for rate in hence.irr_all(offsets, net):
            show("internal rate of return", rate)

        show("Ramsey rate", hence.ramsey_rate(0.015, 1.0, 0.02))
        show("equity weight of the harbour side", hence.equity_weight(21400.0, 34250.0, 1.3))

        # A gap in the data is refused, never valued as something; the index says where it is.
        flows[1, 24] = np.nan
        try:
            basis.present_values(offsets, flows)
        except hence.HenceError as error:
            print(f"refused: {error} (argument {error.argument}, index {error.index})")
            stream, year = np.unravel_index(error.index, flows.shape)
            print(f"which is {NAMES[stream]} in {years[year]:.0f}")


def main():
    curve, timing = sys.argv[1:3] + ["uk-2003", "flows middle"][len(sys.argv) - 1 :]
    try:
        value_the_wall(curve, timing)
    except hence.HenceError as error:
        sys.exit(f"{error} (argument {error.argument}, index {error.index})")


if __name__ == "__main__":
    main()
