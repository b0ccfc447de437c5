"""Writes and reads workbooks without a spreadsheet program.

    books.py write LAYOUT OUT.xlsx|OUT.ods    a workbook of one sheet from a layout, one cell a line:
                                              address, kind (n number, s text, d date, f formula, a array formula),
                                              value, and for an array formula its area
    books.py read FILE...                     every cell: address, kind (n, s, e error value), value, formula

The .xlsx goes through openpyxl; the .ods is written and read here as the XML that it is.
"""

import datetime
import re
import sys
import zipfile
from xml.etree import ElementTree
from xml.sax.saxutils import quoteattr

import openpyxl
from openpyxl.utils import get_column_letter
from openpyxl.utils.cell import coordinate_from_string, column_index_from_string, range_boundaries
from openpyxl.worksheet.formula import ArrayFormula

NAMESPACES = {
    "office": "urn:oasis:names:tc:opendocument:xmlns:office:1.0",
    "table": "urn:oasis:names:tc:opendocument:xmlns:table:1.0",
    "text": "urn:oasis:names:tc:opendocument:xmlns:text:1.0",
    "of": "urn:oasis:names:tc:opendocument:xmlns:of:1.2",
    "manifest": "urn:oasis:names:tc:opendocument:xmlns:manifest:1.0",
    "calcext": "urn:org:documentfoundation:names:experimental:calc:xmlns:calcext:1.0",
}
ODS = "application/vnd.oasis.opendocument.spreadsheet"


def layout(path):
    with open(path, encoding="utf-8") as lines:
        return [line.rstrip("\n").split("\t") for line in lines]


def write_xlsx(cells, out):
    book = openpyxl.Workbook()
    sheet = book.active
    for address, kind, value, *area in cells:
        if kind == "n":
            sheet[address] = float(value)
        elif kind == "d":
            sheet[address] = datetime.date.fromisoformat(value)
        elif kind == "a":
            sheet[address] = ArrayFormula(area[0], value)
        else:
            sheet[address] = value
    book.save(out)


def ods_cell(kind, value, area):
    if kind == "n":
        return '<table:table-cell office:value-type="float" office:value="{}"/>'.format(value)
    if kind == "d":
        return '<table:table-cell office:value-type="date" office:date-value="{}"/>'.format(value)
    if kind == "s":
        text = "<text:p>{}</text:p>".format(quoteattr(value)[1:-1])
        return '<table:table-cell office:value-type="string">{}</table:table-cell>'.format(text)
    spans = ""
    if area:
        left, top, right, bottom = range_boundaries(area[0])
        spans = ' table:number-matrix-columns-spanned="{}" table:number-matrix-rows-spanned="{}"'.format(
            right - left + 1, bottom - top + 1
        )
    return "<table:table-cell table:formula={}{}/>".format(quoteattr("of:" + value), spans)


def write_ods(cells, out):
    rows = {}
    for address, kind, value, *area in cells:
        letters, row = coordinate_from_string(address)
        rows.setdefault(row, {})[column_index_from_string(letters)] = ods_cell(kind, value, area)
    lines = []
    for row in range(1, max(rows) + 1):
        held = rows.get(row, {})
        columns = (held.get(column, "<table:table-cell/>") for column in range(1, max(held, default=1) + 1))
        lines.append("<table:table-row>{}</table:table-row>".format("".join(columns)))
    spaces = " ".join('xmlns:{}="{}"'.format(name, NAMESPACES[name]) for name in ("office", "table", "text", "of"))
    content = (
        '<?xml version="1.0" encoding="UTF-8"?><office:document-content {} office:version="1.2"><office:body>'
        '<office:spreadsheet><table:table table:name="Sheet1">{}</table:table></office:spreadsheet></office:body>'
        "</office:document-content>"
    ).format(spaces, "".join(lines))
    manifest = (
        '<?xml version="1.0" encoding="UTF-8"?><manifest:manifest xmlns:manifest="{}" manifest:version="1.2">'
        '<manifest:file-entry manifest:full-path="/" manifest:media-type="{}"/>'
        '<manifest:file-entry manifest:full-path="content.xml" manifest:media-type="text/xml"/></manifest:manifest>'
    ).format(NAMESPACES["manifest"], ODS)
    with zipfile.ZipFile(out, "w") as package:
        package.writestr("mimetype", ODS)
        package.writestr("content.xml", content)
        package.writestr("META-INF/manifest.xml", manifest)


def read_xlsx(path):
    values = openpyxl.load_workbook(path, data_only=True).worksheets[0]
    for row in openpyxl.load_workbook(path).worksheets[0].iter_rows():
        for cell in row:
            found = values[cell.coordinate]
            formula = cell.value.text if isinstance(cell.value, ArrayFormula) else cell.value
            formula = formula if cell.data_type == "f" else ""
            value = found.value
            if isinstance(value, (datetime.date, datetime.datetime)):
                yield cell.coordinate, "d", value.isoformat()[:10], formula
            elif value is not None or formula:
                kind = found.data_type if value is not None else "s"
                kind = {"n": "n", "e": "e"}.get(kind, "s")
                yield cell.coordinate, kind, repr(float(value)) if kind == "n" else value or "", formula


def named(name):
    space, local = name.split(":")
    return "{%s}%s" % (NAMESPACES[space], local)


def read_ods(path):
    with zipfile.ZipFile(path) as package:
        table = ElementTree.fromstring(package.read("content.xml")).find(".//" + named("table:table"))
    row = 0
    for line in table.iter(named("table:table-row")):
        row += 1
        column = 0
        for cell in line:
            repeated = int(cell.get(named("table:number-columns-repeated"), 1))
            kind = cell.get(named("calcext:value-type")) or cell.get(named("office:value-type"))
            formula = cell.get(named("table:formula"), "")
            for _ in range(repeated if kind else 0):
                column += 1
                address = get_column_letter(column) + str(row)
                text = "\n".join("".join(p.itertext()) for p in cell.findall(named("text:p")))
                if kind == "date":
                    yield address, "d", cell.get(named("office:date-value")), formula
                elif kind in ("string", "error"):
                    yield address, kind[0], text, formula
                else:
                    yield address, "n", cell.get(named("office:value")), formula
            column += 0 if kind else repeated
        row += int(line.get(named("table:number-rows-repeated"), 1)) - 1


def main():
    what, *files = sys.argv[1:]
    if what == "write":
        {"xlsx": write_xlsx, "ods": write_ods}[re.search(r"\w+$", files[1])[0]](layout(files[0]), files[1])
        return
    for file in files:
        print("file", file, sep="\t")
        for cell in {"xlsx": read_xlsx, "ods": read_ods}[re.search(r"\w+$", file)[0]](file):
            print(*cell, sep="\t")


main()
