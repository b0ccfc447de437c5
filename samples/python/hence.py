"""hence for Python: the C functions through ctypes, over numpy arrays as they stand. To be copied and extended."""

import ctypes
import sys
from ctypes import POINTER, byref, c_char, c_char_p, c_double, c_int32, c_int64, c_size_t, c_uint32, c_uint64, c_void_p

import numpy as np

OK, ERR_CAPACITY = 0, 14
ABI_VERSION = 1
YEARLY, CONTINUOUS = 0, 1
RATE, PREFERENCE, ELASTICITY, GROWTH = range(4)


class _Error(ctypes.Structure):
    """hence_error, field by field; ctypes lays it out as the C compiler does."""

    _fields_ = [
        ("struct_size", c_uint32),
        ("code", c_int32),
        ("argument", c_int32),
        ("index", c_int64),
        ("message", c_char * 256),
    ]


class Growth(ctypes.Structure):
    """hence_growth: growth of consumption as a series shows it, with standard errors."""

    _fields_ = [
        ("struct_size", c_uint32),
        ("has_persistence", c_int32),
        ("trend", c_double),
        ("trend_error", c_double),
        ("mean", c_double),
        ("mean_error", c_double),
        ("trend_growth", c_double),
        ("mean_growth", c_double),
        ("sd", c_double),
        ("sd_error", c_double),
        ("persistence", c_double),
        ("persistence_error", c_double),
    ]


class Spread(ctypes.Structure):
    """hence_spread: how values, one a draw, are spread."""

    _fields_ = [
        ("struct_size", c_uint32),
        ("mean", c_double),
        ("mean_error", c_double),
        ("sd", c_double),
        ("lowest", c_double),
        ("highest", c_double),
        ("positive", c_double),
        ("positive_error", c_double),
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
    "instantaneous_rates": [c_void_p, _ARRAY, c_size_t, _ARRAY],
    "elasticity_from_brackets": [_ARRAY, _ARRAY, _ARRAY, c_size_t, _ARRAY],
    "hazard_from_probability": [_NUMBER, c_int32, _ARRAY],
    "hazard_from_waiting_time": [_NUMBER, c_int32, _ARRAY],
    "growth_estimate": [_ARRAY, POINTER(c_int32), c_size_t, POINTER(Growth)],
    "utility": [_NUMBER, _NUMBER, _ARRAY],
    "marginal_utility": [_NUMBER, _NUMBER, _ARRAY],
    "welfare": [_ARRAY, _ARRAY, c_size_t, _NUMBER, _NUMBER, c_int32, _ARRAY],
    "welfare_factors": [_ARRAY, _ARRAY, c_size_t, _NUMBER, _NUMBER, _NUMBER, c_int32, _ARRAY],
    "compensation": [_NUMBER] * 6 + [c_int32, _ARRAY],
    "equivalent_variation": [_ARRAY, _ARRAY, _ARRAY, c_size_t, _NUMBER, _NUMBER, _ARRAY],
    "compensating_variation": [_ARRAY, _ARRAY, _ARRAY, c_size_t, _NUMBER, _NUMBER, _NUMBER, _ARRAY],
    "equally_distributed_equivalent": [_ARRAY, _ARRAY, c_size_t, _NUMBER, _ARRAY],
    "switching_values": [c_void_p, c_int32, _ARRAY, _ARRAY, c_size_t, _NUMBER, _NUMBER, _ARRAY, c_size_t,
                         POINTER(c_size_t)],
    "switching_multiplier": [_NUMBER, _NUMBER, _ARRAY],
    "draws_value": [c_char_p] * 4 + [_ARRAY, _ARRAY, c_size_t, c_size_t, c_size_t, c_uint64, c_uint32, _ARRAY, _ARRAY],
    "draws_spread": [_ARRAY, c_size_t, _ARRAY, c_size_t, _ARRAY, POINTER(Spread)],
    "draws_rank": [_ARRAY, c_size_t, c_size_t, _ARRAY, _ARRAY],
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


def _alike(*arrays):
    """Arrays of doubles, one shape."""
    arrays = [_numbers(array) for array in arrays]
    if len({array.shape for array in arrays}) != 1:
        raise ValueError("the arrays differ in shape")
    return arrays


def _over(name, arrays, *rest):
    """One number from arrays of one length and numbers behind them."""
    arrays = _alike(*arrays)
    return _scalar(name, *map(_pointer, arrays), arrays[0].size, *rest)


def elasticity_from_brackets(marginal, average, weights):
    """The mean over tax brackets, weighted by taxpayers."""
    return _over("elasticity_from_brackets", [marginal, average, weights])


def hazard_from_probability(probability, compounding=YEARLY):
    return _scalar("hazard_from_probability", probability, compounding)


def hazard_from_waiting_time(years, compounding=YEARLY):
    return _scalar("hazard_from_waiting_time", years, compounding)


def growth(consumption, years=None):
    """Of a value a year; the years themselves, where given, must follow on each other."""
    consumption = _numbers(consumption)
    if years is not None:
        years = np.ascontiguousarray(years, dtype=np.int32)
        if years.shape != consumption.shape:
            raise ValueError("the arrays differ in shape")
        years = years.ctypes.data_as(POINTER(c_int32))
    found = Growth(struct_size=ctypes.sizeof(Growth))
    _call("growth_estimate", _pointer(consumption), years, consumption.size, byref(found))
    return found


def utility(consumption, elasticity):
    return _scalar("utility", consumption, elasticity)


def marginal_utility(consumption, elasticity):
    return _scalar("marginal_utility", consumption, elasticity)


def welfare(consumption, offsets, rho, elasticity, compounding=YEARLY):
    return _over("welfare", [consumption, offsets], rho, elasticity, compounding)


def welfare_factors(consumption, offsets, base, rho, elasticity, compounding=YEARLY):
    consumption, offsets = _alike(consumption, offsets)
    out = np.empty_like(offsets)
    _call("welfare_factors", _pointer(consumption), _pointer(offsets), offsets.size, base, rho, elasticity,
          compounding, _pointer(out))
    return out


def compensation(amount, now, later, years, rho, elasticity, compounding=YEARLY):
    """What must be received later for an amount given up now."""
    return _scalar("compensation", amount, now, later, years, rho, elasticity, compounding)


def equivalent_variation(flows, consumption, factors, base, elasticity):
    """The exact value of flows that are not small: the amount at the base that changes welfare as much."""
    return _over("equivalent_variation", [flows, consumption, factors], base, elasticity)


def compensating_variation(flows, consumption, factors, base, base_flow, elasticity):
    """The most that could be paid for them at the base."""
    return _over("compensating_variation", [flows, consumption, factors], base, base_flow, elasticity)


def equally_distributed_equivalent(consumption, shares, elasticity):
    return _over("equally_distributed_equivalent", [consumption, shares], elasticity)


def switching_multiplier(net, stream):
    return _scalar("switching_multiplier", net, stream)


def draws_value(preference, elasticity, growth, offsets, flows, count, seed, hazard="0%", threads=1):
    """Rates, and values an option a row, under seeded draws of a rate whose parts are texts such as "uniform 0% to 2%".

    Of one option, or of a matrix with an option a row. The threads do not change the results.
    """
    offsets, flows = _numbers(offsets), np.atleast_2d(_numbers(flows))
    if flows.shape[1:] != offsets.shape:
        raise ValueError("each row of flows needs as many flows as there are offsets")
    rates, values = np.empty(count), np.empty((len(flows), count))
    texts = [text.encode() for text in (preference, hazard, elasticity, growth)]
    _call("draws_value", *texts, _pointer(offsets), _pointer(flows), *flows.shape, count, seed, threads,
          _pointer(rates), _pointer(values))
    return rates, values


def draws_spread(values, percentiles=()):
    """How values, one a draw, are spread, and their percentiles."""
    values, percentiles = _numbers(values), _numbers(percentiles)
    found, spread = np.empty_like(percentiles), Spread(struct_size=ctypes.sizeof(Spread))
    _call("draws_spread", _pointer(values), values.size, _pointer(percentiles), percentiles.size, _pointer(found),
          byref(spread))
    return spread, found


def draws_rank(values):
    """The share of draws in which each option, a row of values, is first: alone, and with another one."""
    values = np.atleast_2d(_numbers(values))
    alone, tied = np.empty(len(values)), np.empty(len(values))
    _call("draws_rank", _pointer(values), *values.shape, _pointer(alone), _pointer(tied))
    return alone, tied


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

    def instantaneous_rates(self, offsets):
        return self._each("instantaneous_rates", offsets)

    def switching_values(self, parameter, offsets, flows, lowest, highest):
        """Every value of a parameter (RATE, PREFERENCE, ELASTICITY, GROWTH) at which the flows are worth nothing; for two
        options to swap, the flows of one less those of the other."""
        offsets, flows = _alike(offsets, flows)
        values, count = np.empty(8), c_size_t()
        while True:
            try:
                _call("switching_values", self._handle, parameter, _pointer(offsets), _pointer(flows), flows.size,
                      lowest, highest, _pointer(values), values.size, byref(count))
                return values[: count.value]
            except HenceError as error:  # more than expected: it says how many
                if error.code != ERR_CAPACITY:
                    raise
                values = np.empty(error.index)

    def annual_equivalent(self, value, service_years):
        return _scalar("annual_equivalent", self._handle, value, service_years)
