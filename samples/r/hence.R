# hence for R: functions over hence_shim.c, which check shapes and raise what the library refuses. To be copied.

hence <- local({
  shim <- dyn.load("target/hence_shim.so")

  # A condition of class "hence_error", with the status, the argument of the C function and the index from 0.
  refuse <- function(refusal) {
    text <- paste0(refusal$status, ": ", refusal$message)
    fields <- unclass(refusal)[c("status", "argument", "index")]
    stop(structure(c(list(message = text, call = NULL), fields), class = c("hence_error", "error", "condition")))
  }

  shim_call <- function(name, ...) {
    result <- .Call(getNativeSymbolInfo(name, shim), ...)
    if (inherits(result, "hence_refusal")) refuse(result) else result
  }

  # C takes doubles: an integer vector is turned into them, a vector of doubles stays where it is.
  doubles <- function(x) {
    stopifnot(is.numeric(x))
    if (is.double(x)) x else as.double(x)
  }

  if (!shim_call("same_version")) stop("the library is not the one of this header")

  list(
    basis = function(line) shim_call("basis_parse", line),
    line = function(basis) shim_call("basis_line", basis),
    words = function(basis) shim_call("basis_words", basis),
    offsets_from_years = function(years, base, timing) {
      shim_call("offsets_from_years", doubles(years), base, timing)
    },
    factors = function(basis, offsets) shim_call("factors", basis, doubles(offsets)),
    forward_rates = function(basis, offsets) shim_call("forward_rates", basis, doubles(offsets)),
    # Of one stream, or of a matrix with a stream a column: a value a column.
    present_values = function(basis, offsets, flows) {
      stopifnot(NROW(flows) == length(offsets))
      shim_call("present_values", basis, doubles(offsets), doubles(flows))
    },
    annual_equivalent = function(basis, value, service_years) {
      shim_call("annual_equivalent", basis, value, service_years)
    },
    # Every internal rate of return between two rates.
    irr_all = function(offsets, flows, lowest = -0.5, highest = 1) {
      stopifnot(length(offsets) == length(flows))
      shim_call("irr_all", doubles(offsets), doubles(flows), lowest, highest)
    },
    ramsey_rate = function(rho, eta, g) shim_call("ramsey_rate", rho, eta, g),
    equity_weight = function(income, reference, elasticity) {
      shim_call("equity_weight", income, reference, elasticity)
    }
  )
})
