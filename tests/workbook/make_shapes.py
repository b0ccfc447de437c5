"""Workbooks as openpyxl saves them, in shapes that the tests fill: `make_shapes.py FOLDER`. Every name and figure is invented."""
import datetime
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


if __name__ == "__main__":
    save(tables(), sys.argv[1], "tables.xlsx")
    save(from_1904(), sys.argv[1], "from-1904.xlsx")
