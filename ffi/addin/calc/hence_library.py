"""The library of hence, called through ctypes: values as Calc hands them over go in, values as Calc takes them come out.

Needs nothing but Python 3.5 or later and its standard library.
"""

import ctypes
import os
import platform
import struct
import sys
from array import array
from itertools import chain

import hence_functions
from hence_functions import (
    ABI_VERSION,
    CELL_BLANK,
    CELL_ERROR,
    CELL_NUMBER,
    CELL_TEXT,
    ERR_CAPACITY,
    OK,
)

# Calc keeps an error value as a number that is not one, with its own code in the low bits; here by the numbers of
# ERROR.TYPE. A Calc that did not know a code would show another error, never a number.
CALC_CODES = {1: 521, 2: 532, 3: 519, 4: 524, 5: 525, 6: 503, 7: 32767}
ERROR_VALUES = {
    kind: struct.unpack("<d", struct.pack("<Q", 0x7FF8000000000000 | code))[0] for kind, code in CALC_CODES.items()
}


class Error(ctypes.Structure):
    """hence_error"""

    _fields_ = [
        ("struct_size", ctypes.c_uint32),
        ("code", ctypes.c_int32),
        ("argument", ctypes.c_int32),
        ("index", ctypes.c_int64),
        ("message", ctypes.c_char * 256),
    ]


class Range(ctypes.Structure):
    """hence_range"""

    _fields_ = [
        ("struct_size", ctypes.c_uint32),
        ("rows", ctypes.c_size_t),
        ("columns", ctypes.c_size_t),
        ("numbers", ctypes.c_void_p),
        ("kinds", ctypes.c_void_p),
        ("texts", ctypes.c_void_p),
    ]


def this_platform():
    """The platform as extensions name it, such as linux_x86_64."""
    systems = {"darwin": "macosx", "win32": "windows"}
    machines = {"amd64": "x86_64", "arm64": "aarch64"}
    machine = platform.machine().lower()
    machine = machines.get(machine, machine)
    if machine == "x86_64" and sys.maxsize < 2**32:
        machine = "x86"
    return systems.get(sys.platform, sys.platform) + "_" + machine


def library_path(folder, here):
    """The library for the platform `here` in the extension's folder."""
    holds = sorted(os.listdir(folder)) if os.path.isdir(folder) else []
    if here not in holds:
        found = ", ".join(holds) or "none"
        raise OSError("hence: this extension has no library for {}; it has {}".format(here, found))
    files = sorted(os.listdir(os.path.join(folder, here)))
    return os.path.join(folder, here, files[0])


class Library:
    """The library that came with the extension."""

    def __init__(self):
        extension = os.path.dirname(os.path.dirname(os.path.abspath(__file__)))
        path = library_path(os.path.join(extension, "lib"), this_platform())
        library = ctypes.CDLL(path)
        library.hence_abi_version.restype = ctypes.c_uint32
        found = library.hence_abi_version()
        if found != ABI_VERSION:
            raise OSError(
                "hence: the library {} has interface version {}, the extension needs {}; install hence.oxt again".format(
                    path, found, ABI_VERSION
                )
            )
        pointer, size = ctypes.c_void_p, ctypes.c_size_t
        self._call = self._function(library.hence_worksheet_call, ctypes.c_char_p, pointer, size, pointer, pointer)
        self._shape = self._function(library.hence_answer_shape, pointer, pointer, pointer, pointer)
        self._cells = self._function(library.hence_answer_cells, pointer, pointer, pointer, size, pointer)
        self._text = self._function(library.hence_answer_text, pointer, size, pointer, size, pointer)
        self._free = library.hence_answer_free
        self._free.argtypes = [pointer]
        self._free.restype = None

    @staticmethod
    def _function(function, *types):
        function.argtypes = types
        function.restype = ctypes.c_int32
        return function

    def call(self, name, arguments):
        """Calls a worksheet function; a tuple of rows comes back.

        An argument is None where it is left out, a value, or a tuple of rows.
        """
        ranges, keep = [], []
        for argument in arguments:
            ranges.append(None if argument is None else packed(argument, keep))
        pointers = (ctypes.c_void_p * len(ranges))(*[r and ctypes.addressof(r) for r in ranges])
        error = Error(struct_size=ctypes.sizeof(Error))
        answer = ctypes.c_void_p()
        status = self._call(
            name.encode("ascii"), pointers, len(ranges), ctypes.byref(answer), ctypes.byref(error)
        )
        if status != OK:
            raise RuntimeError("hence: " + error.message.decode("utf-8", "replace"))
        try:
            return self._unpacked(answer)
        finally:
            self._free(answer)

    def _unpacked(self, answer):
        rows, columns = ctypes.c_size_t(), ctypes.c_size_t()
        self._checked(self._shape(answer, ctypes.byref(rows), ctypes.byref(columns), None))
        n, columns = rows.value * columns.value, columns.value
        numbers, kinds = array("d", bytes(8 * n)), array("B", bytes(n))
        self._checked(self._cells(answer, numbers.buffer_info()[0], kinds.buffer_info()[0], n, None))
        cells = numbers
        if kinds.count(CELL_NUMBER) != n:
            cells = list(numbers)
            for i, kind in enumerate(kinds):
                if kind == CELL_TEXT:
                    cells[i] = self._cell_text(answer, i)
                elif kind == CELL_ERROR:
                    cells[i] = ERROR_VALUES[int(cells[i])]
                elif kind == CELL_BLANK:
                    cells[i] = ""
        return tuple(zip(*[iter(cells)] * columns))

    def _cell_text(self, answer, i):
        capacity, error = 256, Error(struct_size=ctypes.sizeof(Error))
        buffer = ctypes.create_string_buffer(capacity)
        status = self._text(answer, i, buffer, capacity, ctypes.byref(error))
        if status == ERR_CAPACITY:
            capacity = error.index
            buffer = ctypes.create_string_buffer(capacity)
            status = self._text(answer, i, buffer, capacity, ctypes.byref(error))
        self._checked(status)
        return buffer.value.decode("utf-8")

    @staticmethod
    def _checked(status):
        if status != OK:
            raise RuntimeError("hence: the library answered with status {}".format(status))


def packed(argument, keep):
    """An argument as a hence_range; what it points to goes into `keep`, which must outlive the call.

    Error values never come here: Calc passes a single one on itself, and refuses a range that holds one.
    """
    rows = argument if isinstance(argument, tuple) else ((argument,),)
    kinds = texts = None
    try:
        numbers = array("d", chain.from_iterable(rows))
    except TypeError:
        numbers, kinds, texts = mixed(list(chain.from_iterable(rows)))
    keep.append((numbers, kinds, texts))
    return Range(
        ctypes.sizeof(Range),
        len(rows),
        len(rows[0]),
        numbers.buffer_info()[0],
        kinds and kinds.buffer_info()[0],
        texts and ctypes.addressof(texts),
    )


def mixed(cells):
    """Numbers, kinds and texts of cells that are not all numbers. Calc hands a blank cell over as an empty text."""
    n = len(cells)
    numbers, kinds, texts = array("d", bytes(8 * n)), array("B", bytes([CELL_BLANK]) * n), None
    for i, cell in enumerate(cells):
        if isinstance(cell, float):
            numbers[i], kinds[i] = cell, CELL_NUMBER
        elif cell:
            if texts is None:
                texts = (ctypes.c_char_p * n)()
            # A NUL would end the text early, and half of a character is none.
            texts[i], kinds[i] = cell.replace("\0", "\ufffd").encode("utf-8", "replace"), CELL_TEXT
    return numbers, kinds, texts
