"""Starts a LibreOffice, asks it through its bridge, prints what it says and ends it.

    ask.py SOFFICE PROFILE cells FILE...    every cell of each workbook, computed anew
    ask.py SOFFICE PROFILE wizard PREFIX    what the function wizard shows of the functions with a prefix
    ask.py SOFFICE PROFILE long ROWS LINE   factors of a line at 0, 1, 2 and so on in one array formula, and the value of
                                            two whole columns that hold 0 to 499
    ask.py SOFFICE PROFILE timed CELLS      seconds that CELLS factors take: by a built-in function of two arguments, by
                                            HENCE.FACTOR in each cell, and by one array formula
"""

import os
import signal
import struct
import subprocess
import sys
import time
import traceback

import uno
from com.sun.star.beans import PropertyValue
from com.sun.star.connection import NoConnectException
from com.sun.star.sheet.FillDirection import TO_BOTTOM
from com.sun.star.sheet.FormulaResult import STRING
from com.sun.star.table.CellContentType import EMPTY, FORMULA, TEXT

PATIENCE = 120


def connect(soffice, profile):
    """The process and its context."""
    pipe = "hence{}".format(os.getpid())
    process = subprocess.Popen(
        [soffice, "-env:UserInstallation=" + profile, "--headless", "--norestore", "--nologo"]
        + ["--accept=pipe,name={};urp;".format(pipe)],
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    local = uno.getComponentContext()
    resolver = local.ServiceManager.createInstanceWithContext("com.sun.star.bridge.UnoUrlResolver", local)
    end = time.time() + PATIENCE
    while True:
        try:
            return process, resolver.resolve("uno:pipe,name={};urp;StarOffice.ComponentContext".format(pipe))
        except NoConnectException:
            if time.time() > end or process.poll() is not None:
                process.kill()
                raise
            time.sleep(0.1)


def service(context, name):
    return context.ServiceManager.createInstanceWithContext(name, context)


def opened(context, url):
    desktop = service(context, "com.sun.star.frame.Desktop")
    return desktop.loadComponentFromURL(url, "_blank", 0, (PropertyValue("Hidden", 0, True, 0),))


def column(index):
    name = ""
    while index >= 0:
        name = chr(ord("A") + index % 26) + name
        index = index // 26 - 1
    return name


def bits(number):
    return struct.pack(">d", number).hex()


def one(cell):
    """Kind and value of a cell: the bits of a number, a text, or an error value as shown."""
    if cell.getError():
        return "e", cell.getString()
    text = cell.Type == TEXT or cell.Type == FORMULA and cell.FormulaResultType2 == STRING
    return ("s", cell.getString()) if text else ("n", bits(cell.getValue()))


def cells(context, *files):
    for file in files:
        document = opened(context, uno.systemPathToFileUrl(file))
        document.calculateAll()
        print("file", file, sep="\t")
        sheet = document.Sheets.getByIndex(0)
        cursor = sheet.createCursor()
        cursor.gotoEndOfUsedArea(False)
        last = cursor.RangeAddress
        for row in range(last.EndRow + 1):
            for index in range(last.EndColumn + 1):
                cell = sheet.getCellByPosition(index, row)
                if cell.Type != EMPTY:
                    formula = cell.FormulaLocal if cell.Type == FORMULA else ""
                    print(column(index) + str(row + 1), *one(cell), formula, sep="\t")
        document.close(True)


def wizard(context, prefix):
    descriptions = service(context, "com.sun.star.sheet.FunctionDescriptions")
    for i in range(descriptions.Count):
        function = {value.Name: value.Value for value in descriptions.getByIndex(i)}
        if function["Name"].startswith(prefix + "."):
            print("function", function["Name"], function["Description"], function["Category"], sep="\t")
            for argument in function["Arguments"]:
                print("argument", argument.Name, argument.Description, sep="\t")


def long(context, rows, line):
    rows = int(rows)
    sheet = opened(context, "private:factory/scalc").Sheets.getByIndex(0)
    sheet.getCellRangeByPosition(0, 0, 0, rows - 1).setDataArray(tuple((float(i),) for i in range(rows)))
    results = sheet.getCellRangeByPosition(1, 0, 1, rows - 1)
    results.setArrayFormula('=HENCE.FACTOR("{}";A1:A{})'.format(line, rows))
    for (value,) in results.getDataArray():
        print(bits(value))
    # Two whole columns, blank below: one number from them.
    sheet.getCellRangeByPosition(3, 0, 3, 499).setDataArray(tuple((float(i),) for i in range(500)))
    value = sheet.getCellByPosition(2, 0)
    value.setFormula('=HENCE.VALUE("{}";D1:D1048576;D1:D1048576)'.format(line))
    print("column", *one(value), sep="\t")


def timed(context, count):
    count = int(count)
    for name, formula, whole in (
        ("POWER", "=POWER($C$1;A{})", False),
        ("cells", "=HENCE.FACTOR($D$1;A{})", False),
        ("array", "=HENCE.FACTOR($D$1;A1:A{})", True),
    ):
        document = opened(context, "private:factory/scalc")
        document.enableAutomaticCalculation(False)
        sheet = document.Sheets.getByIndex(0)
        offsets = tuple((i % 300 + 1.0,) for i in range(count))
        sheet.getCellRangeByPosition(0, 0, 0, count - 1).setDataArray(offsets)
        sheet.getCellByPosition(2, 0).setValue(1 / 1.035)
        sheet.getCellByPosition(3, 0).setString("3.5%")
        results = sheet.getCellRangeByPosition(1, 0, 1, count - 1)
        if whole:
            results.setArrayFormula(formula.format(count))
        else:
            results.getCellByPosition(0, 0).setFormula(formula.format(1))
            results.fillAuto(TO_BOTTOM, 1)
        times = []
        for _ in range(5):
            start = time.perf_counter()
            document.calculateAll()
            times.append(time.perf_counter() - start)
        # What was timed must have been computed: all three are the same factors, to rounding.
        for (offset,), (value,) in zip(offsets, results.getDataArray()):
            if abs(value - 1.035**-offset) > 1e-12:
                raise ValueError("{}: {} at {}".format(name, value, offset))
        print(name, min(times), sep="\t")
        document.close(True)


def main():
    soffice, profile, what, *arguments = sys.argv[1:]
    process, context = connect(soffice, profile)
    try:
        {"cells": cells, "wizard": wizard, "long": long, "timed": timed}[what](context, *arguments)
    finally:
        try:
            service(context, "com.sun.star.frame.Desktop").terminate()
            process.wait(PATIENCE)
        except Exception:
            # It no longer answers. This script runs under `timeout`, whose group holds nothing else.
            traceback.print_exc()
            sys.stderr.flush()
            os.killpg(0, signal.SIGTERM)


main()
