#!/usr/bin/env python3
"""Makes the shelf: two dozen alike workbooks of an invented agency, the Ostrey Waterways Agency.

Each appraises a weir: mend it as it stands, or build it anew. The agency's old rule is 4% throughout. Five workbooks
have a mistake in them, one is protected by a password, one lacks its end. `mistakes.csv` says which is which.

    python3 -m venv venv && venv/bin/pip install XlsxWriter msoffcrypto-tool
    venv/bin/python samples/shelf/make.py

All but the protected one, which is salted anew each time, come out alike every time.
"""

import csv
import datetime
import io
import random
from pathlib import Path

import xlsxwriter
from msoffcrypto.format.ooxml import OOXMLFile
from xlsxwriter.utility import xl_rowcol_to_cell as cell

HERE = Path(__file__).parent
BASE, YEARS, RATE = 2024, 80, 0.04
WEIRS = [
    "Alder Mill", "Birk Sluice", "Carrow Bridge", "Dunnet", "Ellerby", "Fallow Lock", "Garth", "Hazel Ford", "Inver Cut",
    "Jarrow Pool", "Kelder", "Linden Reach", "Marl", "Nettle Island", "Oxley", "Pell", "Quern", "Rowan Gate", "Sallow",
    "Thorne Basin", "Ulver", "Varley", "Withy", "Yarrow",
]
# Weir, kind of mistake, where, in words.
MISTAKES = {
    "Dunnet": ("off-by-period", "both options, discount factors", "the factors are those of the year before"),
    "Hazel Ford": ("short-total", "Build!B14", "the last six years are left out of the present value of avoided closures"),
    "Kelder": ("hard-coded", "Mend!Z13", "a present value was typed over its formula"),
    "Pell": ("negative-cost", "Build!C8:CD8", "upkeep is entered negative"),
    "Sallow": ("years-broken", "Mend!U5", "2041 stands twice"),
}
PROTECTED, TRUNCATED = "Ulver", "Yarrow"
ROWS = {"years": 4, "works": 6, "upkeep": 7, "closures": 8, "factor": 10, "pv_works": 11, "pv_upkeep": 12, "pv_closures": 13}
LABELS = {
    "years": "Year", "works": "Works", "upkeep": "Upkeep", "closures": "Closures of the lock avoided",
    "factor": "Discount factor", "pv_works": "PV of works", "pv_upkeep": "PV of upkeep", "pv_closures": "PV of closures avoided",
}
COSTS, BENEFITS, NPV, RATIO = 15, 16, 17, 18
FIRST, LAST = 2, 1 + YEARS


def flows(dice, option, size):
    """Crowns of 2024 by year. Mending comes cheap, soon and again; building lasts."""
    works, upkeep, closures = [0.0] * YEARS, [0.0] * YEARS, [0.0] * YEARS
    traffic = size * dice.uniform(0.030, 0.052)
    if option == "Mend":
        for year in range(0, YEARS, 15):
            works[year] = round(size * dice.uniform(0.28, 0.34), -2)
    else:
        works[1] = round(size * dice.uniform(0.85, 0.95), -2)
        works[2] = round(size * dice.uniform(0.55, 0.65), -2)
    for year in range(1, YEARS):
        upkeep[year] = round(size * (0.012 if option == "Mend" else 0.004) * dice.uniform(0.9, 1.1), -1)
        if option == "Mend":
            closures[year] = round(traffic * dice.uniform(0.8, 1.2), -1)
        elif year > 2:
            closures[year] = round((traffic * 1.5 + size * 0.0005 * year) * dice.uniform(0.9, 1.1), -1)
    return {"works": works, "upkeep": upkeep, "closures": closures}


def sheet(book, styles, dice, weir, option, size):
    """One option, formulas with the results that a spreadsheet program would store."""
    page = book.add_worksheet(option)
    page.set_column(0, 0, 30)
    page.set_column(1, 1, 14)
    page.freeze_panes(5, 2)
    page.write(0, 0, f"{weir} weir: {option.lower()}", styles["title"])
    page.write(1, 0, "Crowns at 2024 prices", styles["plain"])
    page.write(4, 1, "Total", styles["head"])
    for key, row in ROWS.items():
        page.write(row, 0, LABELS[key], styles["head"] if key == "years" else styles["plain"])
    mistake = MISTAKES.get(weir, (None,))[0]
    late = -1 if mistake == "off-by-period" else 0
    years = [BASE + i for i in range(YEARS)]
    if mistake == "years-broken" and option == "Mend":
        years = [year if year <= 2041 else year - 1 for year in years]
    own = flows(dice, option, size)
    if mistake == "negative-cost" and option == "Build":
        own["upkeep"] = [-x for x in own["upkeep"]]
    factor = [(1 + RATE) ** -(year - BASE + late) for year in years]
    shift = f"{late:+d}" if late else ""
    for i, year in enumerate(years):
        col = FIRST + i
        at = lambda key: cell(ROWS[key], col)
        page.write_number(ROWS["years"], col, year, styles["head"])
        for key in ("works", "upkeep", "closures"):
            page.write_number(ROWS[key], col, own[key][i], styles["money"])
        formula = f"=1/(1+Inputs!$B$4)^({at('years')}-Inputs!$B$3{shift})"
        page.write_formula(ROWS["factor"], col, formula, styles["factor"], factor[i])
        for key in ("works", "upkeep", "closures"):
            formula = f"={at(key)}*{cell(ROWS['factor'], col, row_abs=True)}"
            page.write_formula(ROWS["pv_" + key], col, formula, styles["money"], own[key][i] * factor[i])
    pv = {key: [x * d for x, d in zip(own[key], factor)] for key in own}
    if mistake == "hard-coded" and option == "Mend":
        pv["upkeep"][23] = 1180.0
        page.write_number(ROWS["pv_upkeep"], FIRST + 23, 1180.0, styles["money"])
    total = {}
    for key in own:
        last, values = LAST, pv[key]
        if mistake == "short-total" and option == "Build" and key == "closures":
            last, values = LAST - 6, values[:-6]
        row = ROWS["pv_" + key]
        total[key] = sum(values)
        page.write_formula(row, 1, f"=SUM({cell(row, FIRST)}:{cell(row, last)})", styles["money"], total[key])
        page.write_formula(
            ROWS[key], 1, f"=SUM({cell(ROWS[key], FIRST)}:{cell(ROWS[key], LAST)})", styles["money"], sum(own[key])
        )
    costs, benefits = total["works"] + total["upkeep"], total["closures"]
    for row, label, formula, value, style in (
        (COSTS, "PV of costs", "=B12+B13", costs, "money"),
        (BENEFITS, "PV of benefits", "=B14", benefits, "money"),
        (NPV, "Net present value", "=B17-B16", benefits - costs, "money"),
        (RATIO, "Benefit-cost ratio", "=B17/B16", benefits / costs, "ratio"),
    ):
        page.write(row, 0, label, styles["head"])
        page.write_formula(row, 1, formula, styles[style], value)
    span = lambda row: f"='{option}'!{cell(row, FIRST, True, True)}:{cell(row, LAST, True, True)}"
    for name, key in (
        ("years", "years"), ("cost_works", "works"), ("cost_upkeep", "upkeep"), ("benefit_closures", "closures"),
        ("factor", "factor"), ("pv_works", "pv_works"), ("pv_upkeep", "pv_upkeep"), ("pv_closures", "pv_closures"),
    ):
        book.define_name(f"'{option}'!hence_{name}", span(ROWS[key]))
    for name, row in (("pv_costs", COSTS), ("pv_benefits", BENEFITS), ("npv", NPV), ("ratio", RATIO)):
        book.define_name(f"'{option}'!hence_{name}", f"='{option}'!{cell(row, 1, True, True)}")


def workbook(weir, number):
    """The bytes of one workbook."""
    dice = random.Random(number)
    size = round(dice.uniform(60_000, 900_000), -3)
    held = io.BytesIO()
    book = xlsxwriter.Workbook(held, {"in_memory": True})
    book.set_properties({"created": datetime.datetime(2024, 4, 1), "author": "Ostrey Waterways Agency"})
    kinds = {
        "title": {"bold": True, "font_size": 14}, "head": {"bold": True}, "plain": {}, "rate": {"num_format": "0.0%"},
        "money": {"num_format": "#,##0"}, "factor": {"num_format": "0.0000"}, "ratio": {"num_format": "0.00"},
    }
    styles = {name: book.add_format({"font_name": "Calibri", **kind}) for name, kind in kinds.items()}
    page = book.add_worksheet("Inputs")
    page.set_column(0, 0, 26)
    page.write(0, 0, f"{weir} weir: mend or build", styles["title"])
    page.write(1, 0, "Ostrey Waterways Agency; figures are invented", styles["plain"])
    for row, label, value, style in (
        (2, "Base year", BASE, "plain"), (3, "Discount rate", RATE, "rate"), (4, "Timing", "flows end, base end", "plain"),
        (5, "Prices", "real 2024", "plain"), (6, "Options are ranked by", "npv", "plain"),
    ):
        page.write(row, 0, label, styles["head"])
        page.write(row, 1, value, styles[style])
    for name, row in (("base", 2), ("basis", 3), ("timing", 4), ("price_basis", 5), ("decide", 6)):
        book.define_name(f"hence_{name}", f"=Inputs!{cell(row, 1, True, True)}")
    for option in ("Mend", "Build"):
        sheet(book, styles, dice, weir, option, size)
    book.close()
    return held.getvalue()


def main():
    rows = []
    for number, weir in enumerate(WEIRS, 1):
        folder = HERE / ("north" if number <= 12 else "south")
        folder.mkdir(exist_ok=True)
        path = folder / f"{number:02d}-{weir.lower().replace(' ', '-')}.xlsx"
        data = workbook(weir, number)
        kind, where, words = MISTAKES.get(weir, ("", "", ""))
        if weir == PROTECTED:
            locked = io.BytesIO()
            OOXMLFile(io.BytesIO(data)).encrypt("ostrey", locked)
            data, kind, words = locked.getvalue(), "password-protected", "the password is ostrey"
        if weir == TRUNCATED:
            data, kind, words = data[: len(data) * 2 // 3], "truncated", "the end of the file is missing"
        path.write_bytes(data)
        if kind:
            rows.append([path.relative_to(HERE).as_posix(), kind, where, words])
    with open(HERE / "mistakes.csv", "w", newline="") as out:
        csv.writer(out).writerows([["workbook", "kind", "where", "what"], *rows])


main()
