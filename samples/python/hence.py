"""hence for Python: the C functions through ctypes, over numpy arrays as they stand. To be copied and extended."""

import ctypes
import sys
from ctypes import POINTER, byref, c_char, c_char_p, c_double, c_int32, c_int64, c_size_t, c_uint32, c_void_p

import numpy as np

OK, ERR_CAPACITY = 0, 14
ABI_VERSION = 1


class _Error(ctypes.Structure):
    """hence_error, field by field; ctypes lays it out as the C compiler does."""

    _fields_ = [
        ("struct_size", c_uint32),
        ("code", c_int32),
        ("argument", c_int32),
        ("index", c_int64),
        ("message", c_char * 256),
    ]


class HenceError(ValueError):
    """What the library refused: its status, the argument of the C function (from 1), the index within it (or -1)."""

    def __init__(self, error):
        name = _library.hence_status_name(error.code).decode()
        super().__init__(f"{name}: {error.message.decode()}")
        self.code, self.argument, self.index = error.code, error.argument, error.index


_FILE = {"win32": "hence.dll", "darwin": "libhence.dylib"}.get(sys.platform, "libhence.so")
_library = ctypes.CDLL(_FILE)  # looked for as the system does: LD_LIBRARY_PATH, PATH on Windows
_library.hence_status_name.restype = c_char_p
_library.hence_basis_free.argtypes, _library.hence_basis_free.restype = [c_void_p], None
if _library.hence_abi_version() != ABI_VERSION:
    raise ImportError("the library is not the one that these declarations are of")

# Without the types ctypes would pass every number as an int. The error struct comes last in every one.
_ARRAY, _NUMBER = POINTER(c_double), c_double
for _name, _types in {
    "basis_parse": [c_char_p, POINTER(c_void_p)],
    "basis_line": [c_void_p, c_char_p, c_size_t],
    "basis_describe": [c_void_p, c_char_p, c_size_t],
    "offsets_from_years": [_ARRAY, c_size_t, _NUMBER, c_char_p, _ARRAY],
    "factors": [c_void_p, _ARRAY, c_size_t, _ARRAY],
    "forward_rates": [c_void_p, _ARRAY, c_size_t, _ARRAY],
    "present_values": [c_void_p, _ARRAY, _ARRAY, c_size_t, c_size_t, _ARRAY],
    "annual_equivalent": [c_void_p, _NUMBER, c_int32, _ARRAY],
    "irr_all": [_ARRAY, _ARRAY, c_size_t, _NUMBER, _NUMBER, _ARRAY, c_size_t, POINTER(c_size_t)],
    "ramsey_rate": [_NUMBER, _NUMBER, _NUMBER, _ARRAY],
    "equity_weight": [_NUMBER, _NUMBER, _NUMBER, _ARRAY],
}.items():
    getattr(_library, f"hence_{_name}").argtypes = [*_types, POINTER(_Error)]


def _call(name, *arguments):
    error = _Error(struct_size=ctypes.sizeof(_Error))
    if getattr(_library, f"hence_{name}")(*arguments, byref(error)) != OK:
        raise HenceError(error)


def _numbers(values):
    """The array itself where it is one of doubles without gaps, as C needs it; else such an array made from it."""
    return np.ascontiguousarray(values, dtype=np.float64)


def _pointer(array):
    return array.ctypes.data_as(_ARRAY)


def _scalar(name, *arguments):
    out = c_double()
    _call(name, *arguments, byref(out))
    return out.value


def offsets_from_years(years, base, timing):
    years = _numbers(years)
    out = np.empty_like(years)
    _call("offsets_from_years", _pointer(years), years.size, base, timing.encode(), _pointer(out))
    return out


def irr_all(offsets, flows, lowest=-0.5, highest=1.0):
    """Every internal rate of return between two rates; there cannot be more than flows."""
    offsets, flows = _numbers(offsets), _numbers(flows)
    if offsets.shape != flows.shape:
        raise ValueError("offsets and flows differ in shape")
    rates, count = np.empty_like(flows), c_size_t()
    _call("irr_all", _pointer(offsets), _pointer(flows), flows.size, lowest, highest, _pointer(rates), rates.size,
          byref(count))
    return rates[: count.value]


def ramsey_rate(rho, eta, g):
    return _scalar("ramsey_rate", rho, eta, g)


def equity_weight(income, reference, elasticity):
    return _scalar("equity_weight", income, reference, elasticity)


class Basis:
    """A parsed rate line or schedule, freed at the end of its `with` block, or with the object."""

    def __init__(self, line):
        self._handle = c_void_p()
        _call("basis_parse", line.encode(), byref(self._handle))

    def close(self):
        _library.hence_basis_free(self._handle)
        self._handle = c_void_p()

    def __enter__(self):
        return self

    def __exit__(self, *_):
        self.close()

    def __del__(self):
        self.close()

    def _text(self, name):
        # A buffer of no bytes is too small for any text, and the error says how many are needed.
        try:
            _call(name, self._handle, None, 0)
        except HenceError as error:
            if error.code != ERR_CAPACITY:
                raise
            buffer = ctypes.create_string_buffer(error.index)
        _call(name, self._handle, buffer, len(buffer))
        return buffer.value.decode()

    def line(self):
        return self._text("basis_line")

    def words(self):
        return self._text("basis_describe")

    def _each(self, name, offsets):
        offsets = _numbers(offsets)
        out = np.empty_like(offsets)
        _call(name, self._handle, _pointer(offsets), offsets.size, _pointer(out))
        return out

    def factors(self, offsets):
        return self._each("factors", offsets)

    def forward_rates(self, offsets):
        return self._each("forward_rates", offsets)

    def present_values(self, offsets, flows):
        """Of one stream, or of a matrix with a stream a row: a value a row."""
        offsets, flows = _numbers(offsets), np.atleast_2d(_numbers(flows))
        if flows.shape[1:] != offsets.shape:
            raise ValueError("each row of flows needs as many flows as there are offsets")
        out = np.empty(len(flows))
        _call("present_values", self._handle, _pointer(offsets), _pointer(flows), *flows.shape, _pointer(out))
        return out

    def annual_equivalent(self, value, service_years):
        return _scalar("annual_equivalent", self._handle, value, service_years)
