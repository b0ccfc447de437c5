# Values a flood wall over a hundred years, calling hence from R. The town of Wrenmouth is invented.
#
# From the root of the repository:
#
#     cargo build --release -p hence-ffi
#     cp samples/r/hence_shim.c target/
#     PKG_CPPFLAGS=-Iinclude PKG_LIBS="-Ltarget/release -lhence" R CMD SHLIB -o target/hence_shim.so target/hence_shim.c
#     LD_LIBRARY_PATH=target/release Rscript samples/r/flood_wall.R
#
# Another rate line or schedule and another timing may follow: "3.5% to 30, 3% after" "flows end".

source("samples/r/hence.R")

# The bits stand beside each number, so that two runs can be compared to the last one.
show_number <- function(what, x) {
  bits <- paste(writeBin(as.double(x), raw(), endian = "big"), collapse = "")
  cat(sprintf("%-34s%14.6f  %s\n", what, x, bits))
}

value_the_wall <- function(curve, timing) {
  plan <- read.csv("samples/flood-wall.csv", check.names = FALSE)
  years <- plan$year
  # A matrix with a stream a column lies in memory as the library wants its streams, one after the other.
  flows <- as.matrix(plan[-1])

  # The timing is part of the basis, so that the printed line says all that repeats the values.
  basis <- hence$basis(paste0(curve, "; ", timing))
  cat("basis: ", hence$line(basis), "\n", sep = "")
  cat("in words: ", hence$words(basis), "\n", sep = "")

  # The first year of the file is the base: its flows stand half a year before the year's end.
  offsets <- hence$offsets_from_years(years, years[1], timing)
  factors <- hence$factors(basis, offsets)
  rates <- hence$forward_rates(basis, offsets)
  for (i in seq(1, length(years), by = 25)) {
    show_number(paste("offset in", years[i]), offsets[i])
    show_number(paste("factor in", years[i]), factors[i])
    show_number(paste("forward rate in", years[i]), rates[i])
  }

  values <- hence$present_values(basis, offsets, flows)
  for (s in seq_along(values)) show_number(paste("present value of", colnames(flows)[s]), values[s])
  # Not rowSums, which adds in a wider type where the processor has one: sums would depend on the machine.
  net <- flows[, 1] + flows[, 2] + flows[, 3]
  npv <- hence$present_values(basis, offsets, net)
  show_number("net present value", npv)
  show_number("the same every year", hence$annual_equivalent(basis, npv, length(years) - 1))

  # The wall is rebuilt in the last year: flows that change their sign twice can have two rates of return.
  for (rate in hence$irr_all(offsets, net)) show_number("internal rate of return", rate)

  show_number("Ramsey rate", hence$ramsey_rate(0.015, 1, 0.02))
  show_number("equity weight of the harbour side", hence$equity_weight(21400, 34250, 1.3))

  # A gap in the data is refused, never valued as something; the index says where it is. R's NA is a NaN to C.
  flows[25, 2] <- NA
  tryCatch(
    hence$present_values(basis, offsets, flows),
    hence_error = function(e) {
      cat(sprintf("refused: %s (argument %d, index %.0f)\n", conditionMessage(e), e$argument, e$index))
      at <- arrayInd(e$index + 1, dim(flows)) # the library counts from 0
      cat(sprintf("which is %s in %d\n", colnames(flows)[at[2]], years[at[1]]))
    }
  )
}

arguments <- commandArgs(trailingOnly = TRUE)
curve <- if (length(arguments) > 0) arguments[1] else "uk-2003"
timing <- if (length(arguments) > 1) arguments[2] else "flows middle"
tryCatch(
  value_the_wall(curve, timing),
  hence_error = function(e) {
    message(sprintf("%s (argument %d, index %.0f)", conditionMessage(e), e$argument, e$index))
    quit(status = 1)
  }
)
