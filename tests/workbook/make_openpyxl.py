"""Workbooks as openpyxl saves them, with what analysts put into theirs: `make_openpyxl.py FOLDER [WORKBOOK.xlsm]`.

The second argument is a workbook to take a macro project from; without it the macro workbook gets bytes that only look
like one. Every name and figure is invented.
"""
import datetime
import os
import sys
import zipfile

from openpyxl import Workbook
from openpyxl.cell.rich_text import CellRichText, TextBlock
from openpyxl.cell.text import InlineFont
from openpyxl.chart import BarChart, LineChart, PieChart, Reference, ScatterChart, Series
from openpyxl.comments import Comment
from openpyxl.formatting.rule import CellIsRule, ColorScaleRule, DataBarRule, FormulaRule, IconSetRule
from openpyxl.styles import Alignment, Border, Font, NamedStyle, PatternFill, Protection, Side
from openpyxl.utils.datetime import CALENDAR_MAC_1904
from openpyxl.workbook.defined_name import DefinedName
from openpyxl.workbook.protection import WorkbookProtection
from openpyxl.worksheet.datavalidation import DataValidation
from openpyxl.worksheet.formula import ArrayFormula
from openpyxl.worksheet.pagebreak import Break
from openpyxl.worksheet.table import Table, TableStyleInfo

# The clock must not decide what a test reads.
MADE = datetime.datetime(2026, 1, 5, 9, 30)


def save(book, folder, name):
    book.properties.created = book.properties.modified = MADE
    book.save(os.path.join(folder, name))


def tables():
    """Two tables, one with totals, validation lists, a filter, a hidden sheet that feeds the lists."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Register"
    sheet.append(["Asset", "Kind", "Year", "Cost"])
    for i in range(1, 21):
        sheet.append([f"Pump {i}", "pump" if i % 2 else "valve", 2020 + i, 1000 * i + 0.5])
    table = Table(displayName="Assets", ref="A1:D21")
    table.tableStyleInfo = TableStyleInfo(name="TableStyleMedium9", showRowStripes=True)
    sheet.add_table(table)
    sheet["F1"], sheet["G1"] = "Kind", "Total"
    sheet["F2"], sheet["G2"] = "pump", '=SUMIF(Assets[Kind],F2,Assets[Cost])'
    sheet["F3"], sheet["G3"] = "valve", '=SUMIF(Assets[Kind],F3,Assets[Cost])'
    sheet.add_table(Table(displayName="Totals", ref="F1:G3"))
    lists = book.create_sheet("Lists")
    for row, kind in enumerate(["pump", "valve", "weir & sluice", 'the "old" gate'], start=1):
        lists.cell(row, 1, kind)
    lists.sheet_state = "hidden"
    choice = DataValidation(type="list", formula1="Lists!$A$1:$A$4", allow_blank=True)
    choice.error, choice.prompt = "Choose from the list", "The kind of asset"
    choice.add("B2:B21")
    year = DataValidation(type="whole", operator="between", formula1="1990", formula2="2100")
    year.add("C2:C500")
    for rule in (choice, year):
        sheet.add_data_validation(rule)
    sheet.freeze_panes = "B2"
    sheet.column_dimensions["A"].width = 24
    return book


def formats():
    """Conditional formats of every kind, named styles, rich text, merged cells, groups, row and column styles."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Formats"
    for row in range(1, 31):
        for col in range(1, 8):
            sheet.cell(row, col, row * col - 40 + col / 7)
    add = sheet.conditional_formatting.add
    add("A1:A30", ColorScaleRule(start_type="min", start_color="F8696B", mid_type="percentile", mid_value=50,
                                 mid_color="FFEB84", end_type="max", end_color="63BE7B"))
    add("B1:B30", DataBarRule(start_type="min", end_type="max", color="638EC6"))
    add("C1:C30", IconSetRule("3TrafficLights1", "percent", [0, 33, 67]))
    add("D1:D30", CellIsRule(operator="lessThan", formula=["0"], font=Font(color="9C0006")))
    add("E1:G30", FormulaRule(formula=["$E1>$F1"], fill=PatternFill(bgColor="FFC7CE", fill_type="solid")))
    money = NamedStyle(name="Money", number_format='#,##0.00 "cr";[Red]-#,##0.00 "cr"', font=Font(bold=True))
    book.add_named_style(money)
    for row in range(1, 31):
        sheet.cell(row, 7).style = "Money"
    thin = Side(style="thin")
    sheet["I2"] = CellRichText("plain ", TextBlock(InlineFont(b=True), "bold"), " and  spaced ")
    sheet["I2"].border = Border(left=thin, right=thin, top=thin, bottom=thin)
    sheet["I4"] = "a merged heading"
    sheet["I4"].alignment = Alignment(horizontal="center", wrap_text=True, textRotation=45)
    sheet.merge_cells("I4:L6")
    sheet.row_dimensions.group(10, 15, hidden=True)
    sheet.column_dimensions.group("N", "P", outline_level=2)
    sheet.column_dimensions["B"].number_format = "0.000"
    sheet.row_dimensions[20].height = 33
    sheet.print_title_rows, sheet.print_area = "1:2", "A1:L30"
    sheet.row_breaks.append(Break(id=15))
    sheet.oddHeader.center.text = "Page &P of &N & more"
    sheet.page_setup.orientation, sheet.page_setup.fitToHeight = "landscape", 0
    sheet.auto_filter.ref = "A1:G30"
    sheet.sheet_properties.tabColor = "1072BA"
    return book


def charts():
    """Charts of four kinds, on a sheet and on a sheet of their own, and notes."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Flows"
    sheet.append(["Year", "Cost", "Benefit"])
    for t in range(30):
        sheet.append([2026 + t, 1000 if t < 3 else 50, 0 if t < 3 else 180])
    for kind, at in ((BarChart(), "E2"), (LineChart(), "E18"), (PieChart(), "O2")):
        kind.add_data(Reference(sheet, min_col=2, max_col=3, min_row=1, max_row=31), titles_from_data=True)
        kind.set_categories(Reference(sheet, min_col=1, min_row=2, max_row=31))
        kind.title = "Costs & benefits"
        sheet.add_chart(kind, at)
    points = ScatterChart()
    points.scatterStyle = "lineMarker"
    points.series.append(Series(Reference(sheet, min_col=3, min_row=2, max_row=31),
                                Reference(sheet, min_col=1, min_row=2, max_row=31), title="Benefit"))
    page = book.create_chartsheet("Chart")
    page.add_chart(points)
    sheet["B2"].comment = Comment("From the contract,\nyear 1", "A. Analyst")
    sheet["C5"].comment = Comment("Estimate <unsure> & old", "B. Reviewer")
    return book


def formulas():
    """Names of every scope, array formulas, whole columns, volatile functions, links, awkward sheet names."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Q1 x"
    for row in range(1, 13):
        sheet.cell(row, 1, 2026 + row)
        sheet.cell(row, 2, row * 1.5)
        sheet.cell(row, 3, f"=B{row}*Rate*(1+local_share)")
    other = book.create_sheet("It's 100% & <so>")
    other["A1"], other["A2"] = 0.035, "='Q1 x'!C12+SUM('Q1 x'!B:B)"
    other["A3"], other["A4"] = "=TODAY()-DATE(2026,1,1)", '=INDIRECT("\'Q1 x\'!B3")'
    other["A5"] = ArrayFormula("A5:A7", "=TRANSPOSE('Q1 x'!A1:C1)")
    other["B1"] = "=HYPERLINK(\"https://example.org/?a=1&b=2\",\"the source\")"
    other["B2"].hyperlink = "https://example.org/report"
    other["B3"], other["B4"], other["B5"] = True, "=1/0", "=OFFSET('Q1 x'!A1,2,1)"
    book.defined_names["Rate"] = DefinedName("Rate", attr_text="'It''s 100% & <so>'!$A$1")
    book.defined_names["Fixed"] = DefinedName("Fixed", attr_text='"text & more"')
    sheet.defined_names["local_share"] = DefinedName("local_share", attr_text="0.25")
    for name in ("R1C1 like", "A1", "Übersicht", "数字", "3D"):
        book.create_sheet(name)["B2"] = name
    book["A1"].sheet_state = "veryHidden"
    return book


def dates1904():
    """Days counted from 1904, dates of several formats, manual calculation."""
    book = Workbook()
    book.epoch = CALENDAR_MAC_1904
    sheet = book.active
    sheet.title = "Dates"
    for row in range(1, 25):
        sheet.cell(row, 1, datetime.date(2026 + row, 3, 31))
        sheet.cell(row, 2, datetime.datetime(2026, 1, row, 12, 30))
        sheet.cell(row, 3, f"=YEAR(A{row})")
        sheet.cell(row, 1).number_format = "yyyy-mm-dd" if row % 2 else "d mmm yy"
    book.calculation.calcMode = "manual"
    return book


def protected():
    """A locked structure, a protected sheet with unlocked cells, and scenarios of views."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Locked"
    sheet.append(["Input", "Value"])
    sheet.append(["growth", 0.02])
    sheet["B2"].protection = Protection(locked=False)
    sheet.protection.sheet = True
    sheet.protection.password = "open"
    sheet.sheet_view.showGridLines = False
    sheet.sheet_view.zoomScale = 85
    book.security = WorkbookProtection(workbookPassword="open", lockStructure=True)
    book.create_sheet("Free")["A1"] = "nothing locked here"
    book.active = 1
    return book


def streamed():
    """Rows as the streaming writer leaves them, with long and odd texts."""
    book = Workbook(write_only=True)
    sheet = book.create_sheet("Data")
    for row in range(300):
        sheet.append([row, None, f" text {row} ", "=A1+1", row / 3, row % 2 == 0, "x" * (row * 20), "a\nb\tc"])
    return book


def with_macros(folder, source):
    """The tables again as .xlsm, with a macro project."""
    project = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(range(256)) * 8
    if source:
        with zipfile.ZipFile(source) as macros:
            project = macros.read(next(n for n in macros.namelist() if n.lower().endswith("vbaproject.bin")))
    kind = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"
    macro_kind = "application/vnd.ms-excel.sheet.macroEnabled.main+xml"
    link = ('<Relationship Id="macros" Type="http://schemas.microsoft.com/office/2006/relationships/vbaProject" '
            'Target="vbaProject.bin"/></Relationships>')
    plain = os.path.join(folder, "tables.xlsx")
    with zipfile.ZipFile(plain) as old, zipfile.ZipFile(os.path.join(folder, "macros.xlsm"), "w") as new:
        for entry in old.infolist():
            text = old.read(entry)
            if entry.filename == "[Content_Types].xml":
                default = '<Default Extension="bin" ContentType="application/vnd.ms-office.vbaProject"/><Override '
                text = text.decode().replace(kind, macro_kind).replace("<Override ", default, 1).encode()
            if entry.filename == "xl/_rels/workbook.xml.rels":
                text = text.decode().replace("</Relationships>", link).encode()
            new.writestr(entry, text)
        new.writestr(zipfile.ZipInfo("xl/vbaProject.bin", MADE.timetuple()[:6]), project)


def main():
    folder = sys.argv[1]
    for make in (tables, formats, charts, formulas, dates1904, protected, streamed):
        save(make(), folder, f"{make.__name__}.xlsx")
    with_macros(folder, sys.argv[2] if len(sys.argv) > 2 else None)


main()
