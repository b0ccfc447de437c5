"""Workbooks as openpyxl saves them, in shapes that the tests fill: `make_shapes.py FOLDER`. Every name and figure is invented."""
import calendar
import datetime
import math
import os
import sys

from openpyxl import Workbook
from openpyxl.utils.datetime import CALENDAR_MAC_1904
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.worksheet.table import Table, TableFormula, TableStyleInfo

# The clock must not decide what a test reads.
MADE = datetime.datetime(2026, 1, 5, 9, 30)


def save(book, folder, name):
    book.properties.created = book.properties.modified = MADE
    book.save(os.path.join(folder, name))


def name(book, role, refers):
    book.defined_names[f"hence_{role}"] = DefinedName(f"hence_{role}", attr_text=refers)


def tables():
    """Years, flows and targets in the columns of a table with totals; formulas over its filled columns."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Plan"
    for row in [["Base", 2026], ["Basis", "3.5%"], ["NPV", None], []]:
        sheet.append(row)
    sheet.append(["Year", "Works [k]", "Gain", "Factor", "PV of works", "Share"])
    for i in range(6):
        sheet.append([2026 + i, 100 - 10 * i, 60 + 5 * i, None, None, "=Flows[[#This Row],[PV of works]]/10"])
    sheet.append(["Total", "=SUBTOTAL(109,Flows[Works '[k']])", None, None, "=SUBTOTAL(109,Flows[PV of works])"])
    table = Table(displayName="Flows", ref="A5:F12", totalsRowCount=1)
    table.tableStyleInfo = TableStyleInfo(name="TableStyleMedium2", showRowStripes=True)
    table._initialise_columns()
    for column, heading in zip(table.tableColumns, sheet[5]):
        column.name = heading.value
    table.tableColumns[0].totalsRowLabel = "Total"
    table.tableColumns[1].totalsRowFunction = "sum"
    table.tableColumns[4].totalsRowFunction = "sum"
    table.tableColumns[5].calculatedColumnFormula = TableFormula(attr_text="Flows[[#This Row],[PV of works]]/10")
    sheet.add_table(table)
    sheet["H1"], sheet["H2"] = "Sum of PV", "=SUM(Flows[PV of works])"
    sheet["I1"], sheet["I2"] = "Last factor", "=INDEX(Flows[[#Data],[Factor]],6)"
    name(book, "base", "Plan!$B$1")
    name(book, "basis", "Plan!$B$2")
    name(book, "npv", "Plan!$B$3")
    name(book, "years", "Flows[Year]")
    name(book, "cost_works", "Flows[[#Data],[Works '[k']]]")
    name(book, "benefit_gain", "Flows[Gain]")
    name(book, "factor", "Flows[Factor]")
    name(book, "pv_works", "Flows[PV of works]")
    return book


def from_1904(base=datetime.date(2026, 4, 1)):
    """Dates counted from 1904, of the base and of the flows."""
    book = Workbook()
    book.epoch = CALENDAR_MAC_1904
    sheet = book.active
    sheet.title = "Plan"
    dates = [base, datetime.date(2026, 10, 1), datetime.date(2027, 4, 1), datetime.date(2028, 4, 1)]
    sheet.append(["Base", base])
    sheet.append(["Basis", "3.5%"])
    sheet.append([])
    sheet.append(["Date", *dates])
    sheet.append(["Works", 100, 50, 25, 5])
    sheet.append(["Factor"])
    sheet.append(["PV"])
    name(book, "base", "Plan!$B$1")
    name(book, "basis", "Plan!$B$2")
    name(book, "years", "Plan!$B$4:$E$4")
    name(book, "cost_works", "Plan!$B$5:$E$5")
    name(book, "factor", "Plan!$B$6:$E$6")
    name(book, "pv_works", "Plan!$B$7")
    return book


def offsets(spans, first, flows, base, unit):
    """t_i = first + the spans before + flows x the span - base x unit, term by term."""
    return [first + math.fsum(spans[:i]) + flows * span - base * unit for i, span in enumerate(spans)]


def banded(t, bands):
    """The factor under forward rates: (rate, to) in order, the last one without end; the first extends backwards."""
    log, start = 0.0, 0.0
    for k, (rate, to) in enumerate(bands):
        inside = min(t, to) - start if k else min(t, to)
        if k == 0 or inside > 0:
            log -= inside * math.log1p(rate)
        start = to
    return math.exp(log)


def laid_out(rows, roles):
    """A sheet Plan of these rows, and the names of its cells."""
    book = Workbook()
    book.active.title = "Plan"
    for row in rows:
        book.active.append(row)
    for role, refers in roles.items():
        name(book, role, refers)
    return book


def months():
    """Two years of months, numbered from 1; the base is the end of month 0."""
    works = [10 + (i % 5) for i in range(24)]
    gain = [2 * i for i in range(24)]
    book = laid_out(
        [
            ["Base", 2026, None, "Years per column", "=1/12"],
            ["Basis", "6%"],
            ["Month", *range(1, 25)],
            ["Works", *works],
            ["Gain", *gain],
            ["Factor"],
            ["NPV", None, "Annual", None, "Payback", None],
        ],
        {
            "base": "Plan!$B$1", "span": "Plan!$E$1", "basis": "Plan!$B$2", "years": "Plan!$B$3:$Y$3",
            "cost_works": "Plan!$B$4:$Y$4", "benefit_gain": "Plan!$B$5:$Y$5", "factor": "Plan!$B$6:$Y$6",
            "npv": "Plan!$B$7", "annual": "Plan!$D$7", "payback": "Plan!$F$7",
        },
    )
    book.active["E1"] = 1 / 12
    factors = [1.06 ** (-n / 12) for n in range(1, 25)]
    values = [(g - w) * d for g, w, d in zip(gain, works, factors)]
    npv = math.fsum(values)
    # Linear between the ends of two months, the last crossing from below.
    total, paid = 0.0, None
    for n, value in enumerate(values, start=1):
        if total < 0 <= total + value:
            paid = (n - 1) / 12 + (-total / value) / 12
        total += value
    annuity = 1 / 1.06 + 1 / 1.06 ** 2
    return book, {"B6": factors[0], "M6": 1 / 1.06, "Y6": 1.06 ** -2, "B7": npv, "D7": npv / annuity, "F7": paid}


def month_ends():
    """Months labelled by their last days: dated flows, which need no years per column."""
    base = datetime.date(2025, 12, 31)
    days = [datetime.date(2026 + i // 12, i % 12 + 1, calendar.monthrange(2026 + i // 12, i % 12 + 1)[1]) for i in range(30)]
    net = [-40] * 6 + [12] * 24
    book = laid_out(
        [["Base", base], ["Basis", "4%"], ["Month", *days], ["Net", *net], ["Factor"], ["NPV"]],
        {
            "base": "Plan!$B$1", "basis": "Plan!$B$2", "years": "Plan!$B$3:$AE$3", "flow_net": "Plan!$B$4:$AE$4",
            "factor": "Plan!$B$5:$AE$5", "npv": "Plan!$B$6",
        },
    )
    # Whole anniversaries of the base, and days over the length of the year under way.
    ts = []
    for day in days:
        whole = day.year - 2025 - (1 if (day.month, day.day) < (12, 31) else 0)
        start = datetime.date(2025 + whole, 12, 31)
        ts.append(whole + (day - start).days / (datetime.date(2026 + whole, 12, 31) - start).days)
    factors = [1.04 ** -t for t in ts]
    npv = math.fsum(x * d for x, d in zip(net, factors))
    return book, {"B5": 1.04 ** -(31 / 365), "M5": 1 / 1.04, "Y5": 1.04 ** -2, "AE5": factors[-1], "B6": npv}


def mixed():
    """Years, then blocks of years; bands, prices of the day, a price that grows; flows in the middle, base at the start."""
    spans = [1] * 5 + [5, 5, 10]
    years = [2026, 2027, 2028, 2029, 2030, 2031, 2036, 2041]
    works = [100, 90, 20, 20, 20, 110, 120, 260]
    power = [0, 5, 10, 10, 10, 55, 60, 125]
    book = laid_out(
        [
            ["Base", 2025, "Basis", "3.5% to 10, 3% after", "Timing", "flows middle, base start"],
            ["Inflation", 0.02, "Growth of power", 0.015, "Prices", "real 2026"],
            ["Years per column", *spans],
            ["Year", *years],
            ["Works", *works],
            ["Power", *power],
            ["Factor"],
            ["PV of works"],
            ["NPV", None, "PV of power", None, "Annual"],
        ],
        {
            "base": "Plan!$B$1", "basis": "Plan!$D$1", "timing": "Plan!$F$1", "prices": "Plan!$B$2",
            "growth_power": "Plan!$D$2", "price_basis": "Plan!$F$2", "span": "Plan!$B$3:$I$3",
            "years": "Plan!$B$4:$I$4", "cost_works": "Plan!$B$5:$I$5", "benefit_power": "Plan!$B$6:$I$6",
            "factor": "Plan!$B$7:$I$7", "pv_works": "Plan!$B$8:$I$8", "npv": "Plan!$B$9", "pv_power": "Plan!$D$9", "annual": "Plan!$F$9",
        },
    )
    bands = [(0.035, 10), (0.03, math.inf)]
    factors = [banded(t, bands) for t in offsets(spans, 1, 0.5, 0, 1)]
    # Prices of a period are those of its middle, from the middle of 2026, a year after the base.
    ns = [t - 1 for t in offsets(spans, 1, 0.5, 0.5, 1)]
    cost = [x / 1.02 ** n * d for x, n, d in zip(works, ns, factors)]
    gain = [x / 1.02 ** n * 1.015 ** n * d for x, n, d in zip(power, ns, factors)]
    npv = math.fsum(gain) - math.fsum(cost)
    # The last year of the last period, 2050, is the 26th from the start of 2025.
    annuity = math.fsum(banded(n, bands) for n in range(1, 27))
    return book, {
        "B7": factors[0], "G7": factors[5], "I7": factors[7], "G8": cost[5], "I8": cost[7],
        "B9": npv, "D9": math.fsum(gain), "F9": npv / annuity,
    }


def quarters():
    """Quarters of the first two years, then years, numbered from 0, the base quarter; a tail after the last year."""
    spans = [0.25] * 8 + [1, 1, 1]
    flow = [-80, -60, -40, -20, 0, 5, 5, 5, 22, 23, 24]
    book = laid_out(
        [
            ["Basis", "4%", "Tail", "growing 1%, for ever"],
            ["Years per column", *spans],
            ["Period", *range(11)],
            ["Net", *flow],
            ["Factor"],
            ["Rates of return", None, "NPV", None],
        ],
        {
            "basis": "Plan!$B$1", "tail_net": "Plan!$D$1", "span": "Plan!$B$2:$L$2", "years": "Plan!$B$3:$L$3",
            "flow_net": "Plan!$B$4:$L$4", "factor": "Plan!$B$5:$L$5", "npv": "Plan!$D$6",
        },
    )
    ts = offsets(spans, 0, 1, 1, 0.25)
    factors = [1.04 ** -t for t in ts]
    # A perpetuity from the year after the last flow: x (1 + g)/(r - g).
    npv = math.fsum(x * d for x, d in zip(flow, factors)) + flow[-1] * factors[-1] * 1.01 / 0.03
    return book, {"B5": 1, "E5": 1.04 ** -0.75, "I5": 1.04 ** -1.75, "J5": 1.04 ** -2.75, "D6": npv}


def template():
    """A template, from which a workbook is made."""
    book = laid_out(
        [["Base", 2026, "Basis", "3.5%"], ["Year", 2026, 2027, 2028], ["Works", 9, 8, 7], ["Factor"], ["Costs"]],
        {
            "base": "Plan!$B$1", "basis": "Plan!$D$1", "years": "Plan!$B$2:$D$2", "cost_works": "Plan!$B$3:$D$3",
            "factor": "Plan!$B$4:$D$4", "pv_costs": "Plan!$B$5",
        },
    )
    book.template = True
    factors = [1.035 ** -t for t in range(3)]
    return book, {"B4": 1, "C4": factors[1], "D4": factors[2], "B5": 9 + 8 * factors[1] + 7 * factors[2]}


def halves():
    """Financial years down a column with blocks; flows at the start; a stream on a basis of its own; no factors."""
    spans = [1, 1, 3, 5]
    years = ["2025/26", "2026/27", "2027/28", "2030/31"]
    works, care = [50, 40, 30, 20], [1, 2, 9, 20]
    book = laid_out(
        [
            ["Base", "2026/27", "Basis", "5%; flows start, base start", "Basis of care", "1.5%"],
            ["Year", "Span", "Works", "Care", "Net PV"],
            *[[y, s, w, c] for y, s, w, c in zip(years, spans, works, care)],
            ["NPV", None, "Costs", None, "IRR"],
        ],
        {
            "base": "Plan!$B$1", "basis": "Plan!$D$1", "basis_care": "Plan!$F$1", "years": "Plan!$A$3:$A$6",
            "span": "Plan!$B$3:$B$6", "cost_works": "Plan!$C$3:$C$6", "benefit_care": "Plan!$D$3:$D$6",
            "pv": "Plan!$E$3:$E$6", "npv": "Plan!$B$7", "pv_costs": "Plan!$D$7",
        },
    )
    ts = offsets(spans, -1, 0, 0, 1)
    cost = [x * 1.05 ** -t for x, t in zip(works, ts)]
    gain = [x * 1.015 ** -t for x, t in zip(care, ts)]
    return book, {
        "E3": gain[0] - cost[0], "E6": gain[3] - cost[3], "B7": math.fsum(gain) - math.fsum(cost), "D7": math.fsum(cost),
    }


if __name__ == "__main__":
    folder = sys.argv[1]
    save(tables(), folder, "tables.xlsx")
    save(from_1904(), folder, "from-1904.xlsx")
    for make in (months, month_ends, mixed, quarters, halves, template):
        book, expected = make()
        save(book, folder, f"{make.__name__}.xlsx")
        for cell, value in expected.items():
            print(make.__name__, f"Plan!{cell}", repr(float(value)))
