/* The C interface of hence: discount factors, rates and present values.
 *
 * Made by cbindgen from the Rust source; not edited by hand. A function returns a status, HENCE_OK (0) when it is done,
 * and leaves its outputs untouched otherwise; an output may overlap no other argument. The rate to use is set by the body
 * that funds or reviews the appraisal. */

#ifndef HENCE_H
#define HENCE_H

#include <stddef.h>
#include <stdint.h>

// The version of the binary interface: raised when a function, struct or constant changes its meaning.
#define HENCE_ABI_VERSION 1

// A cell holds a number; a date is its serial number, day 0 being 30 December 1899.
#define HENCE_CELL_NUMBER 0

// A cell holds a text.
#define HENCE_CELL_TEXT 1

// A cell is blank.
#define HENCE_CELL_BLANK 2

// A cell holds TRUE (number 1) or FALSE (number 0).
#define HENCE_CELL_LOGICAL 3

// A cell holds an error value; its number is that of ERROR.TYPE: 1 #NULL!, 2 #DIV/0!, 3 #VALUE!, 4 #REF!, 5 #NAME?,
// 6 #NUM!, 7 #N/A.
#define HENCE_CELL_ERROR 4

// The longest array accepted, in elements.
#define HENCE_LENGTH_MAX 1073741824

// Yearly compounding: a year of waiting divides by 1 + rate.
#define HENCE_COMPOUNDING_YEARLY 0

// Continuous compounding: a year of waiting multiplies by exp(-rate).
#define HENCE_COMPOUNDING_CONTINUOUS 1

// Done.
#define HENCE_OK 0

// A required pointer is NULL, or an array is NULL with a length above 0.
#define HENCE_ERR_NULL 10

// A pointer is not aligned for its type.
#define HENCE_ERR_ALIGNMENT 11

// A length is above HENCE_LENGTH_MAX, or there is no memory for as many results.
#define HENCE_ERR_LENGTH 12

// An output overlaps an input or another output.
#define HENCE_ERR_OVERLAP 13

// The caller's buffer is too small.
#define HENCE_ERR_CAPACITY 14

// A text is not UTF-8.
#define HENCE_ERR_UTF8 15

// An input is NaN or infinite, or the result would be.
#define HENCE_ERR_NOT_FINITE 20

// A rate or parameter is outside its range.
#define HENCE_ERR_RANGE 21

// An offset is outside the curve's domain.
#define HENCE_ERR_DOMAIN 22

// Arrays differ in length or are empty.
#define HENCE_ERR_SHAPE 23

// A sum does not converge, or the quantity has no meaning for these inputs.
#define HENCE_ERR_NO_MEANING 24

// A text does not follow its grammar.
#define HENCE_ERR_SYNTAX 30

// No schedule of that id is known.
#define HENCE_ERR_SCHEDULE 31

// The curve needs a base year or a length that was not given.
#define HENCE_ERR_CONTEXT 32

// This version does not offer what was asked.
#define HENCE_ERR_UNSUPPORTED 33

// A fault inside the library; nothing was written.
#define HENCE_ERR_INTERNAL 90

// A flat yearly rate in place of the basis.
#define HENCE_PARAMETER_RATE 0

// Pure time preference of a basis that states it.
#define HENCE_PARAMETER_PREFERENCE 1

// Elasticity of marginal utility of a basis that states it.
#define HENCE_PARAMETER_ELASTICITY 2

// Growth of a basis that states it; of a path that of its first band, the others moving along.
#define HENCE_PARAMETER_GROWTH 3

// The range that a worksheet function gives back. Opaque and immutable: any number of threads may use one.
typedef struct hence_answer hence_answer;

// A parsed basis with its curve. Opaque and immutable: any number of threads may use one.
typedef struct hence_basis hence_basis;

// A range of cells that a caller hands over, row by row. One value is a range of one cell.
typedef struct {
  // sizeof(hence_range), set by the caller.
  uint32_t struct_size;
  // The number of rows, at least 1.
  size_t rows;
  // The number of columns, at least 1.
  size_t columns;
  // rows x columns numbers; where a cell holds no number, its place is not looked at.
  const double *numbers;
  // rows x columns kinds, HENCE_CELL_...; NULL where every cell holds a number.
  const uint8_t *kinds;
  // rows x columns texts, each NUL-ended UTF-8; NULL where no cell holds a text. Only the places of texts are looked
  // at.
  const char *const *texts;
} hence_range;

// What went wrong, written into the caller's own struct, which may overlap no other argument. Nothing in it is
// allocated or freed.
typedef struct {
  // In: sizeof(hence_error), set by the caller. A smaller size gets only the fields that fit.
  uint32_t struct_size;
  // Out: the status, as returned.
  int32_t code;
  // Out: the argument it is about, counted from 1; 0 where it is about none.
  int32_t argument;
  // Out: the index within that argument, from 0; within a text the character (HENCE_ERR_UTF8: the byte); what is needed
  // (HENCE_ERR_CAPACITY); -1 where there is none.
  int64_t index;
  // Out: the message, UTF-8, always ended by NUL, cut at a character.
  char message[256];
} hence_error;

// How values, one a draw, are spread, written into the caller's own struct.
typedef struct {
  // In: sizeof(hence_spread), set by the caller.
  uint32_t struct_size;
  // Out: their mean.
  double mean;
  // Out: the mean's standard error.
  double mean_error;
  // Out: their standard deviation; 0 of a single value.
  double sd;
  // Out: the least.
  double lowest;
  // Out: the greatest.
  double highest;
  // Out: the share of values above 0, which is how probable such a value is.
  double positive;
  // Out: the standard error of that share.
  double positive_error;
} hence_spread;

// What a series of consumption says of its growth, written into the caller's own struct. Every rate is a fraction per
// year; standard errors bear the name of their figure.
typedef struct {
  // In: sizeof(hence_growth), set by the caller.
  uint32_t struct_size;
  // Out: 1 where the persistence is known, 0 where growth is the same every year.
  int32_t has_persistence;
  // Out: log growth along the straight line through ln c, by least squares.
  double trend;
  // Out: its standard error.
  double trend_error;
  // Out: the mean of yearly log growth, which depends on the first and the last value only.
  double mean;
  // Out: its standard error.
  double mean_error;
  // Out: growth along the trend, exp(trend) - 1.
  double trend_growth;
  // Out: geometric mean growth, exp(mean) - 1.
  double mean_growth;
  // Out: the standard deviation of yearly log growth.
  double sd;
  // Out: its standard error.
  double sd_error;
  // Out: the first-order autocorrelation of yearly log growth; 0 where it is not known.
  double persistence;
  // Out: its standard error; 0 where it is not known.
  double persistence_error;
} hence_growth;

#ifdef __cplusplus
extern "C" {
#endif // __cplusplus

// The version of the binary interface that this library was built with.
//
// A program compares it with HENCE_ABI_VERSION of its header. Threads: any.
uint32_t hence_abi_version(void);

// Calls a worksheet function, as the add-ins do.
//
// What is wrong with an argument becomes an error value in the cells concerned; a status other than HENCE_OK says that
// the call itself was not sound. The function "WHY" calls another one, and says in words what is wrong.
//
// In cells: HENCE.WHY.
//
// Arguments: `function` (in, NUL-ended UTF-8, borrowed, not NULL): "FACTOR" or "HENCE.FACTOR", in any case;
// `arguments` (in, `n` pointers, borrowed with all they point to; NULL only when `n` is 0): a NULL pointer among them
// is an argument left out; `n` (in); `out` (out, not NULL): a new answer, caller owns (free with hence_answer_free);
// `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_UTF8; HENCE_ERR_SYNTAX where there
// is no such function; HENCE_ERR_SHAPE for a range without cells, HENCE_ERR_RANGE for a struct_size that is too small or
// a kind that is not known, each with the number of the argument, from 0, as index.
// Threads: any.
int32_t hence_worksheet_call(const char *function,
                             const hence_range *const *arguments,
                             size_t n,
                             hence_answer **out,
                             hence_error *error);

// Frees an answer. NULL is allowed. Threads: no other thread may be using it.
void hence_answer_free(hence_answer *answer);

// The numbers of rows and columns of an answer.
//
// Arguments: `answer` (in, not NULL); `rows`, `columns` (out, not NULL, both at least 1); `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_OVERLAP. Threads: any.
int32_t hence_answer_shape(const hence_answer *answer,
                           size_t *rows,
                           size_t *columns,
                           hence_error *error);

// The cells of an answer, row by row.
//
// Arguments: `answer` (in, not NULL); `numbers` (out, `n` doubles): the number of a cell, the ERROR.TYPE number of an
// error value, 0 for a text; `kinds` (out, `n` bytes): HENCE_CELL_NUMBER, HENCE_CELL_TEXT or HENCE_CELL_ERROR; `n` (in):
// rows x columns; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_OVERLAP; HENCE_ERR_CAPACITY with the number of cells
// as index where `n` is another. Threads: any.
int32_t hence_answer_cells(const hence_answer *answer,
                           double *numbers,
                           uint8_t *kinds,
                           size_t n,
                           hence_error *error);

// The text of a cell of an answer; empty where it holds no text.
//
// Arguments: `answer` (in, not NULL); `cell` (in): its place, row by row from 0; `buffer` (out): `capacity` bytes of the
// caller's, gets NUL-ended UTF-8; `capacity` (in); `error` (out, may be NULL). A buffer that is too small is
// HENCE_ERR_CAPACITY, with the bytes needed as index, and stays untouched.
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_CAPACITY; HENCE_ERR_LENGTH where there is no such
// cell. Threads: any.
int32_t hence_answer_text(const hence_answer *answer,
                          size_t cell,
                          char *buffer,
                          size_t capacity,
                          hence_error *error);

// Parses a rate line, a rate as text, or the id of a built-in schedule.
//
// Arguments: `line` (in, NUL-ended UTF-8, borrowed, not NULL); `out` (out, not NULL): a new handle, caller
// owns (free with hence_basis_free); `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT; HENCE_ERR_UTF8 with the byte as index; HENCE_ERR_SYNTAX,
// HENCE_ERR_SCHEDULE with the character as index; HENCE_ERR_RANGE, HENCE_ERR_NOT_FINITE for a rate, weight, edge or
// other parameter that cannot be, with the character as index where one number is to blame, else -1;
// HENCE_ERR_UNSUPPORTED; HENCE_ERR_CONTEXT for curves with calendar edges or by project length, which
// hence_basis_parse_at takes.
// Threads: any.
int32_t hence_basis_parse(const char *line,
                          hence_basis **out,
                          hence_error *error);

// Parses a basis whose curve needs a base year or the appraisal's length.
//
// Arguments: `line` as for hence_basis_parse; `base_year` (in): the calendar year of the base, 1000 to 9999, for edges in
// calendar years; 0 where it is not given; `length` (in): the appraisal's length in years, above 0, for curves by
// project length; 0 where it is not given; `out` and `error` as for hence_basis_parse.
// Returns as hence_basis_parse, a base year or a length that is missing (HENCE_ERR_CONTEXT) or cannot be
// (HENCE_ERR_RANGE, HENCE_ERR_NOT_FINITE) being the argument at fault; HENCE_ERR_DOMAIN for a length past the last edge
// of the curve.
// Threads: any.
int32_t hence_basis_parse_at(const char *line,
                             int32_t base_year,
                             double length,
                             hence_basis **out,
                             hence_error *error);

// Frees a handle. NULL is allowed. Threads: no other thread may be using the handle.
void hence_basis_free(hence_basis *basis);

// The basis in words, with its source.
//
// In cells: HENCE.EXPLAIN.
//
// Arguments: `basis` (in, not NULL); `buffer` (out): `capacity` bytes of the caller's, gets NUL-ended UTF-8;
// `capacity` (in); `error` (out, may be NULL). A buffer that is too small is HENCE_ERR_CAPACITY, with the bytes
// needed as index, and stays untouched.
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_CAPACITY, HENCE_ERR_LENGTH. Threads: any.
int32_t hence_basis_describe(const hence_basis *basis,
                             char *buffer,
                             size_t capacity,
                             hence_error *error);

// The canonical text of the basis, which parses back to the same basis: its rate line, or its schedule's id, with the
// timing that it states.
//
// Arguments, statuses and threads as hence_basis_describe.
int32_t hence_basis_line(const hence_basis *basis,
                         char *buffer,
                         size_t capacity,
                         hence_error *error);

// The timing that the basis states, its own before its schedule's, as hence_offsets_from_years takes it: "flows middle,
// base end"; "flows end, base end" where it states none.
//
// Arguments, statuses and threads as hence_basis_describe.
int32_t hence_basis_timing(const hence_basis *basis,
                           char *buffer,
                           size_t capacity,
                           hence_error *error);

// The rate line of a built-in schedule, with the timing it states.
//
// In cells: HENCE.SCHEDULE.
//
// Arguments: `id` (in, NUL-ended UTF-8, borrowed, not NULL; in any case); `buffer`, `capacity` and `error` as for
// hence_basis_describe.
// Returns as hence_basis_describe; HENCE_ERR_UTF8 with the byte as index; HENCE_ERR_SCHEDULE where no such schedule is
// built in; HENCE_ERR_UNSUPPORTED for a table of factors, which no line can state. Threads: any.
int32_t hence_schedule_line(const char *id,
                            char *buffer,
                            size_t capacity,
                            hence_error *error);

// Offsets of flows from their years: (year - base) + position of the flows - position of the base, in years, the
// positions being start 0, middle 1/2 and end 1.
//
// Arguments: `years` (in, `n` doubles, borrowed; NULL only when `n` is 0): calendar years, first years of financial
// years, or year numbers; `n` (in); `base` (in): the base year, counted alike; `timing` (in, NUL-ended UTF-8, borrowed):
// "flows middle, base start" and so on, NULL for end and end; `offsets` (out, `n` doubles, may not overlap `years`);
// `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_UTF8;
// HENCE_ERR_NOT_FINITE with the index; HENCE_ERR_SYNTAX, or HENCE_ERR_NO_MEANING for an averaged base, with the
// character of `timing` as index; HENCE_ERR_UNSUPPORTED for averaged flows, which stand at two offsets: call with
// "flows start" and "flows end", and take the mean of the two factors. Threads: any.
int32_t hence_offsets_from_years(const double *years,
                                 size_t n,
                                 double base,
                                 const char *timing,
                                 double *offsets,
                                 hence_error *error);

// Offsets of dates from the base date, in years.
//
// Arguments: `dates` (in, `n` int32_t, borrowed; NULL only when `n` is 0): yyyymmdd, such as 20260401; `n` (in); `base`
// (in): the base date, written alike; `day_count` (in, NUL-ended UTF-8, borrowed): "anniversaries" (whole anniversaries
// of the base date and actual days over the length of the last part-year), "actual/365", "actual/actual ISDA" or
// "30E/360", NULL for anniversaries; `offsets` (out, `n` doubles, may not overlap `dates`); `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_UTF8;
// HENCE_ERR_SYNTAX for what is no date of the years 1000 to 9999, with the index, or no day count. Threads: any.
int32_t hence_offsets_from_dates(const int32_t *dates,
                                 size_t n,
                                 int32_t base,
                                 const char *day_count,
                                 double *offsets,
                                 hence_error *error);

// Discount factors D(t), one an offset.
//
// In cells: HENCE.FACTOR.
//
// Arguments: `basis` (in, not NULL); `offsets` (in, years from the base, `n` doubles, borrowed; NULL only when `n` is
// 0); `n` (in); `factors` (out, `n` doubles, may not overlap `offsets`); `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_NOT_FINITE or
// HENCE_ERR_DOMAIN with the index. Threads: any.
int32_t hence_factors(const hence_basis *basis,
                      const double *offsets,
                      size_t n,
                      double *factors,
                      hence_error *error);

// Forward rates of the years that end at the offsets: D(t-1)/D(t) - 1, fractions per year.
//
// In cells: HENCE.RATE.
//
// Arguments, statuses and threads as hence_factors.
int32_t hence_forward_rates(const hence_basis *basis,
                            const double *offsets,
                            size_t n,
                            double *rates,
                            hence_error *error);

// Mean yearly rates to the offsets: D(t)^(-1/t) - 1, at 0 its limit, fractions per year. With continuous compounding the
// mean rate is ln(1 + this).
//
// In cells: HENCE.MEANRATE.
//
// Arguments, statuses and threads as hence_factors.
int32_t hence_mean_rates(const hence_basis *basis,
                         const double *offsets,
                         size_t n,
                         double *rates,
                         hence_error *error);

// Instantaneous rates at the offsets: -D'(t)/D(t), fractions per year with continuous compounding; at an edge that of the
// earlier band.
//
// In cells: HENCE.INSTANT.
//
// Arguments, statuses and threads as hence_factors.
int32_t hence_instantaneous_rates(const hence_basis *basis,
                                  const double *offsets,
                                  size_t n,
                                  double *rates,
                                  hence_error *error);

// Net present values of options under seeded draws of the discount rate: in each draw one flat yearly rate, preference +
// hazard + elasticity x growth, each part drawn from its own distribution.
//
// The same seed gives the same draws, to the last bit, on every platform and for any number of threads; draw k does not
// depend on how many are made.
//
// In cells: HENCE.DRAWS.
//
// Arguments: `preference`, `hazard`, `elasticity`, `growth` (in, NUL-ended UTF-8, borrowed, not NULL but for `hazard`, where
// NULL is none): a value ("1%", of the elasticity "1.5", of the hazard also "every 100 years"), "normal mean 1% sd 0.3%", the
// same with "within 0% to 2%", "uniform 1% to 3%", "triangular 1%, 1.5%, 2%" or "0.3 at 1%, 0.7 at 2%"; `offsets` (in, `n`
// doubles, years from the base, -10,000 to 10,000); `flows` (in, `rows` x `n` doubles, net, row by row: the option i begins
// at number i x n); `rows` (in, at least 1); `n` (in; 0 makes every value 0); `count` (in), how many draws, 1 to 10,000,000;
// `seed` (in); `threads` (in, at least 1) that share the work; `rates` (out, `count` doubles, or NULL where they are not
// wanted), the rate of each draw; `values` (out, `rows` x `count` doubles, row by row: the draws of option i begin at number
// i x count); outputs may overlap no other argument; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_UTF8 with the byte
// and HENCE_ERR_SYNTAX with the character as index; HENCE_ERR_NOT_FINITE, HENCE_ERR_DOMAIN with the index of the offset or
// flow; HENCE_ERR_SHAPE without options or for another number of draws; HENCE_ERR_RANGE for a distribution, and for no
// threads; HENCE_ERR_NO_MEANING for bounds that keep less than 1% of a normal distribution. Where draws fall outside what a
// rate line may state, HENCE_ERR_RANGE is about their distribution (or, where only the rate falls outside -50% to 100%,
// about no argument) with the first such draw as index: draws are never left out quietly. A value too large is
// HENCE_ERR_NOT_FINITE about no argument, with the draw as index. Threads: any.
int32_t hence_draws_value(const char *preference,
                          const char *hazard,
                          const char *elasticity,
                          const char *growth,
                          const double *offsets,
                          const double *flows,
                          size_t rows,
                          size_t n,
                          size_t count,
                          uint64_t seed,
                          uint32_t threads,
                          double *rates,
                          double *values,
                          hence_error *error);

// Percentiles, mean, standard deviation and the share above 0 of values, one a draw.
//
// Arguments: `values` (in, `n` doubles, in any order); `n` (in, at least 1); `percentiles` (in, `count` doubles, 0 to 100,
// in any order; NULL only when `count` is 0); `count` (in); `found` (out, `count` doubles): the value below which as many
// percent of the values fall, linear between neighbours; `spread` (out, not NULL, with its struct_size set); outputs may
// overlap no other argument; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_NOT_FINITE with the
// index; HENCE_ERR_RANGE for a percentile, with its index, and for a struct_size that is too small; HENCE_ERR_SHAPE
// without values. Threads: any.
int32_t hence_draws_spread(const double *values,
                           size_t n,
                           const double *percentiles,
                           size_t count,
                           double *found,
                           hence_spread *spread,
                           hence_error *error);

// How probable it is that each option ranks first: the share of draws in which its value is above every other's.
//
// Arguments: `values` (in, `rows` x `count` doubles, row by row, as hence_draws_value gives them); `rows` (in, at least 1);
// `count` (in, at least 1); `alone` (out, `rows` doubles), the share of draws in which the option is first alone; `tied`
// (out, `rows` doubles), in which it is first with another one; outputs may overlap no other argument; `error` (out, may
// be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_NOT_FINITE with the
// index; HENCE_ERR_SHAPE without values. Threads: any.
int32_t hence_draws_rank(const double *values,
                         size_t rows,
                         size_t count,
                         double *alone,
                         double *tied,
                         hence_error *error);

// The Ramsey rate rho + eta g, a fraction per year.
//
// Arguments: `rho` (in) time preference and hazard, a fraction per year; `eta` (in) elasticity of marginal utility, 0
// to 20; `g` (in) growth of consumption per head, a fraction per year; `rate` (out, one double, not NULL); `error`
// (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE. Threads: any.
int32_t hence_ramsey_rate(double rho,
                          double eta,
                          double g,
                          double *rate,
                          hence_error *error);

// The Ramsey rate where growth is uncertain and independent from year to year: rho + eta g - eta (eta + 1) sd^2 / 2, a
// fraction per year.
//
// In cells: HENCE.RAMSEY.
//
// Arguments: `rho`, `eta` and `g` as for hence_ramsey_rate, `g` the expected growth; `sd` (in) its standard deviation, a
// fraction per year, 0 or more; `rate` (out, one double, not NULL); `error` (out, may be NULL).
// Returns and threads as hence_ramsey_rate.
int32_t hence_ramsey_rate_uncertain(double rho,
                                    double eta,
                                    double g,
                                    double sd,
                                    double *rate,
                                    hence_error *error);

// The elasticity of marginal utility that tax rates imply by equal absolute sacrifice: ln(1 - marginal) / ln(1 -
// average), a pure number.
//
// In cells: HENCE.ELASTICITY.
//
// Arguments: `marginal` (in) the marginal rate of tax, a fraction from 0 to below 1; `average` (in) tax as a share of
// the same income, a fraction above 0 and below 1; `elasticity` (out, one double, not NULL); `error` (out, may be
// NULL).
// Returns and threads as hence_ramsey_rate.
int32_t hence_elasticity_from_taxes(double marginal,
                                    double average,
                                    double *elasticity,
                                    hence_error *error);

// The elasticity of marginal utility that several brackets of a tax schedule imply: the mean of what each implies by equal
// absolute sacrifice, as for hence_elasticity_from_taxes, weighted by taxpayers; a pure number.
//
// In cells: HENCE.BRACKETS.
//
// Arguments: `marginal`, `average` (in, `n` doubles each, fractions as for hence_elasticity_from_taxes); `weights` (in, `n`
// doubles, 0 or more): the taxpayers of each bracket, or their share; `n` (in, at least 1); `elasticity` (out, one double,
// not NULL, may not overlap the inputs); `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
// HENCE_ERR_RANGE for a rate or a weight that cannot be, with its index, and for weights that sum to 0; HENCE_ERR_SHAPE
// without brackets. Threads: any.
int32_t hence_elasticity_from_brackets(const double *marginal,
                                       const double *average,
                                       const double *weights,
                                       size_t n,
                                       double *elasticity,
                                       hence_error *error);

// The hazard, a fraction per year, of a yearly probability p that benefits end for good: p/(1 - p) with yearly
// compounding, -ln(1 - p) with continuous.
//
// In cells: HENCE.HAZARD.
//
// Arguments: `probability` (in), a fraction from 0 to below 1; `compounding` (in), HENCE_COMPOUNDING_..., of the rate that
// the hazard is part of; `hazard` (out, one double, not NULL); `error` (out, may be NULL).
// Returns and threads as hence_ramsey_rate.
int32_t hence_hazard_from_probability(double probability,
                                      int32_t compounding,
                                      double *hazard,
                                      hence_error *error);

// The hazard, a fraction per year, of an expected waiting time until benefits end for good: 1/(years - 1) with yearly
// compounding, 1/years with continuous.
//
// In cells: HENCE.WAITING.
//
// Arguments: `years` (in), the expected time, above 1 with yearly compounding, else above 0; `compounding`, `hazard` and
// `error` as for hence_hazard_from_probability.
// Returns and threads as hence_ramsey_rate.
int32_t hence_hazard_from_waiting_time(double years,
                                       int32_t compounding,
                                       double *hazard,
                                       hence_error *error);

// The equity weight of a group: (reference / income)^elasticity, a pure number.
//
// In cells: HENCE.WEIGHT.
//
// Arguments: `income` (in) of the group and `reference` (in) income, in the same unit and above 0; `elasticity` (in) of
// marginal utility, 0 to 20; `weight` (out, one double, not NULL); `error` (out, may be NULL).
// Returns as hence_ramsey_rate; HENCE_ERR_NO_MEANING for an income of 0 or less. Threads: any.
int32_t hence_equity_weight(double income,
                            double reference,
                            double elasticity,
                            double *weight,
                            hence_error *error);

// The real rate behind a nominal rate: (1 + nominal) / (1 + inflation) - 1, a fraction per year.
//
// In cells: HENCE.REAL.
//
// Arguments: `nominal` (in) and `inflation` (in), fractions per year above -1; `rate` (out, one double, not NULL);
// `error` (out, may be NULL).
// Returns and threads as hence_ramsey_rate.
int32_t hence_real_rate(double nominal,
                        double inflation,
                        double *rate,
                        hence_error *error);

// Estimates growth of consumption from a series: trend, mean, standard deviation and persistence.
//
// In cells: HENCE.GROWTH.
//
// Arguments: `consumption` (in, `n` doubles, a value a year, a head and in prices of one year, above 0, in any unit);
// `years` (in, `n` int32_t, may be NULL), the calendar year of each value, which must follow on each other; `n` (in, at
// least 4); `growth` (out, not NULL, with its struct_size set, may not overlap the inputs); `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_RANGE for a
// struct_size that is too small; HENCE_ERR_SHAPE for fewer than four values; HENCE_ERR_NOT_FINITE, HENCE_ERR_NO_MEANING for
// a value of 0 or less, and HENCE_ERR_SYNTAX for a year that does not follow the one before it, each with the index.
// Threads: any.
int32_t hence_growth_estimate(const double *consumption,
                              const int32_t *years,
                              size_t n,
                              hence_growth *growth,
                              hence_error *error);

// Present value of one stream: the sum of D(offset) x flow, correctly rounded from the factors.
//
// Arguments: `basis` (in, not NULL); `offsets` (in, `n` doubles, years from the base); `flows` (in, `n` doubles,
// any sign); `n` (in; 0 gives 0); `value` (out, one double, not NULL, may not overlap the inputs); `error` (out, may be
// NULL).
// Returns and threads as hence_factors.
int32_t hence_present_value(const hence_basis *basis,
                            const double *offsets,
                            const double *flows,
                            size_t n,
                            double *value,
                            hence_error *error);

// Present values of several streams at the same offsets, one a stream, each as hence_present_value gives it.
//
// In cells: HENCE.VALUE.
//
// Arguments: `basis` (in, not NULL); `offsets` (in, `n` doubles, years from the base); `flows` (in, `rows` x `n`
// doubles, row by row: the stream i begins at number i x n); `rows` (in; 0 writes nothing); `n` (in; 0 gives 0 for each
// stream); `values` (out, `rows` doubles, may not overlap the inputs); `error` (out, may be NULL).
// Returns as hence_factors, an index of `flows` counting from its first. Threads: any.
int32_t hence_present_values(const hence_basis *basis,
                             const double *offsets,
                             const double *flows,
                             size_t rows,
                             size_t n,
                             double *values,
                             hence_error *error);

// The constant amount a year, over service years 1 to N, that has the present value given: value / (D(1) + ... + D(N)).
//
// In cells: HENCE.ANNUAL.
//
// Arguments: `basis` (in, not NULL); `value` (in), money at the base; `service_years` (in), N, 1 to 100,000; `annual`
// (out, one double, not NULL), money per year; `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE; HENCE_ERR_NO_MEANING for other numbers of
// years; HENCE_ERR_DOMAIN where the curve ends before N. Threads: any.
int32_t hence_annual_equivalent(const hence_basis *basis,
                                double value,
                                int32_t service_years,
                                double *annual,
                                hence_error *error);

// Every internal rate of return in an interval, rising: the rates r with sum of flow x (1+r)^-offset = 0.
//
// In cells: HENCE.IRR.
//
// Arguments: `offsets` (in, `n` doubles, years, in any order); `flows` (in, `n` doubles, net flows); `n` (in, at least
// 1); `lowest`, `highest` (in), the interval, both above -1: -0.5 and 1 as a rule; `rates` (out, `capacity` doubles;
// NULL only when `capacity` is 0; may not overlap the inputs); `capacity` (in): n - 1 is always enough for flows at
// different offsets; `count` (out, one size_t, not NULL, may not overlap the arrays): how many there are, 0 for none;
// `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
// HENCE_ERR_RANGE for an interval that is empty or reaches -1; HENCE_ERR_CAPACITY with the number of rates as index;
// HENCE_ERR_SHAPE without flows; HENCE_ERR_NO_MEANING where every flow is 0, or where the flows do not settle how many
// rates there are (the value only touches zero, or rates lie too close together to be told apart); the message then
// says where. Threads: any.
int32_t hence_irr_all(const double *offsets,
                      const double *flows,
                      size_t n,
                      double lowest,
                      double highest,
                      double *rates,
                      size_t capacity,
                      size_t *count,
                      hence_error *error);

// The name of a status, as static text: "HENCE_ERR_DOMAIN". Unknown numbers give "unknown status".
//
// Returns: static, never NULL, not to be freed. Threads: any.
const char *hence_status_name(int32_t code);

// Every value of a parameter of the basis, rising, at which the net present value is zero, all else as it is. For two
// options to swap, give the flows of one less those of the other.
//
// In cells: HENCE.SWITCH.
//
// Arguments: `basis` (in, not NULL; of the rate it does not matter which); `parameter` (in), HENCE_PARAMETER_...; `offsets`
// (in, `n` doubles, years from the base, in any order); `flows` (in, `n` doubles, net flows); `n` (in, at least 1);
// `lowest`, `highest` (in), the interval: -0.5 and 1 as a rule, of the elasticity 0 and 20; what leaves rates of -90% and
// below is left out of it; `values` (out, `capacity` doubles; NULL only when `capacity` is 0); `capacity` (in); `count`
// (out, one size_t, not NULL): how many there are, 0 for none; outputs may overlap no other argument; `error` (out, may be
// NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
// HENCE_ERR_RANGE for a parameter that is not known and for an interval that is empty; HENCE_ERR_CAPACITY with the number
// of values as index; HENCE_ERR_SHAPE without flows; HENCE_ERR_DOMAIN for an offset where the curve is not defined;
// HENCE_ERR_UNSUPPORTED where the basis is not stated by the parameter; HENCE_ERR_NO_MEANING where every flow is 0, or
// where the flows do not settle how many values there are; the message then says where. Threads: any.
int32_t hence_switching_values(const hence_basis *basis,
                               int32_t parameter,
                               const double *offsets,
                               const double *flows,
                               size_t n,
                               double lowest,
                               double highest,
                               double *values,
                               size_t capacity,
                               size_t *count,
                               hence_error *error);

// The multiple of one stream at which the net present value is zero: 1 - net/stream; 1 is the stream as it is.
//
// In cells: HENCE.MULTIPLIER.
//
// Arguments: `net` (in), the net present value, or that of one option less another's; `stream` (in), the part of it that
// is multiplied, with its sign in the net: a cost is negative; `multiplier` (out, one double, not NULL); `error` (out, may
// be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE; HENCE_ERR_NO_MEANING for a stream that adds
// nothing, so that no multiple of it changes the sign. Threads: any.
int32_t hence_switching_multiplier(double net,
                                   double stream,
                                   double *multiplier,
                                   hence_error *error);

// The utility of a consumption: (c^(1-eta) - 1)/(1 - eta), and ln c at an elasticity eta of 1.
//
// In cells: HENCE.UTILITY.
//
// Arguments: `consumption` (in), a head and year, above 0 in any unit of money; `elasticity` (in) of marginal utility, 0
// to 20; `utility` (out, one double, not NULL), 0 at a consumption of 1; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE; HENCE_ERR_NO_MEANING for a
// consumption of 0 or less. Threads: any.
int32_t hence_utility(double consumption,
                      double elasticity,
                      double *utility,
                      hence_error *error);

// The utility of one more unit of consumption: c^-eta.
//
// In cells: HENCE.MARGINAL.
//
// Arguments: `consumption` and `elasticity` (in) as for hence_utility; `utility` (out, one double, not NULL), per unit of
// consumption; `error` (out, may be NULL).
// Returns and threads as hence_utility.
int32_t hence_marginal_utility(double consumption,
                               double elasticity,
                               double *utility,
                               hence_error *error);

// The welfare of a path of consumption: the sum of utilities over (1 + rho)^offset with yearly compounding, times
// exp(-rho offset) with continuous. Only which of two paths is better, and ratios of differences, have a meaning.
//
// In cells: HENCE.WELFARE.
//
// Arguments: `consumption` (in, `n` doubles, a head, above 0); `offsets` (in, `n` doubles, years from the base, in any
// order); `n` (in; 0 gives 0); `rho` (in), pure time preference and hazard together, a fraction per year, above -1 with
// yearly compounding; `elasticity` (in) of marginal utility, 0 to 20; `compounding` (in), HENCE_COMPOUNDING_...;
// `welfare` (out, one double, not NULL, may not overlap the inputs); `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_RANGE;
// HENCE_ERR_NOT_FINITE, and HENCE_ERR_NO_MEANING for a consumption of 0 or less, with the index. Threads: any.
int32_t hence_welfare(const double *consumption,
                      const double *offsets,
                      size_t n,
                      double rho,
                      double elasticity,
                      int32_t compounding,
                      double *welfare,
                      hence_error *error);

// The discount factors along a path of consumption, what one small unit at each date is worth at the base:
// (base/c)^eta over (1 + rho)^offset with yearly compounding, times exp(-rho offset) with continuous.
//
// Arguments: `consumption`, `offsets`, `n`, `rho`, `elasticity`, `compounding` and `error` as for hence_welfare; `base`
// (in), the consumption at the base, above 0; `factors` (out, `n` doubles, may not overlap the inputs).
// Returns and threads as hence_welfare.
int32_t hence_welfare_factors(const double *consumption,
                              const double *offsets,
                              size_t n,
                              double base,
                              double rho,
                              double elasticity,
                              int32_t compounding,
                              double *factors,
                              hence_error *error);

// What must be received later so that giving up an amount now leaves welfare as it was. For small amounts the
// rate of return between the two is the Ramsey rate.
//
// In cells: HENCE.COMPENSATION.
//
// Arguments: `amount` (in), given up now; negative where it is received now and given up later; `now`, `later` (in),
// consumption at the two dates before the shift, above 0, in the unit of the amount; `years` (in) from the one to the
// other; `rho`, `elasticity` and `compounding` (in) as for hence_welfare; `received` (out, one double, not NULL), in the
// unit of the amount; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE; HENCE_ERR_NO_MEANING for a
// consumption of 0 or less, where the amount leaves nothing, and where no amount later is enough. Threads: any.
int32_t hence_compensation(double amount,
                           double now,
                           double later,
                           double years,
                           double rho,
                           double elasticity,
                           int32_t compounding,
                           double *received,
                           hence_error *error);

// The exact value of flows that are not small against consumption: the amount at the base, without the project, that
// changes welfare as much as they do (equivalent variation). The sum of factor x flow is its limit for small flows.
//
// In cells: HENCE.EXACT.
//
// Arguments: `flows` (in, `n` doubles), benefits less costs in the unit of consumption, both totals or both a head;
// `consumption` (in, `n` doubles, above 0), at the date of each flow without the project; `factors` (in, `n` doubles, 0 or
// more), the discount factor of each flow, as hence_factors and hence_welfare_factors give them; `n` (in; 0 gives 0);
// `base` (in), the consumption at the base, above 0; `elasticity` (in) of marginal utility, 0 to 20; `value` (out, one
// double, not NULL, may not overlap the inputs), money at the base; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE,
// HENCE_ERR_RANGE; HENCE_ERR_NO_MEANING with the index for a factor below 0 and for a consumption of 0 or less, with the
// flow or without; without an index where no amount at the base is worth as much. Threads: any.
int32_t hence_equivalent_variation(const double *flows,
                                   const double *consumption,
                                   const double *factors,
                                   size_t n,
                                   double base,
                                   double elasticity,
                                   double *value,
                                   hence_error *error);

// The most that could be paid at the base for flows that are not small against consumption: the amount which, taken from
// those who have the project, leaves them as well off as without it (compensating variation); negative for what must be
// received. Not above hence_equivalent_variation.
//
// Arguments: `flows`, `consumption`, `factors`, `n`, `base`, `elasticity`, `value` and `error` as for
// hence_equivalent_variation; `base_flow` (in), the flow at the base itself, which the flows hold too; 0 where none
// stands there.
// Returns as hence_equivalent_variation; HENCE_ERR_NO_MEANING also where the base flow leaves no consumption. Threads: any.
int32_t hence_compensating_variation(const double *flows,
                                     const double *consumption,
                                     const double *factors,
                                     size_t n,
                                     double base,
                                     double base_flow,
                                     double elasticity,
                                     double *value,
                                     hence_error *error);

// The consumption which, had everybody that much, would give the welfare of an unequal distribution:
// (sum of share x c^(1-eta))^(1/(1-eta)), the geometric mean at an elasticity eta of 1. Divided by the
// mean it is 1 less Atkinson's index of inequality.
//
// In cells: HENCE.EQUIVALENT.
//
// Arguments: `consumption` (in, `n` doubles, above 0), of each group a head; `shares` (in, `n` doubles, 0 or more, summing
// to 1), of each group in the population; `n` (in, at least 1); `elasticity` (in) of marginal utility, 0 to 20;
// `equivalent` (out, one double, not NULL, may not overlap the inputs), a head; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
// HENCE_ERR_NO_MEANING for a consumption of 0 or less, with the index; HENCE_ERR_RANGE for the elasticity, for a negative
// share, with the index, and for shares that do not sum to 1; HENCE_ERR_SHAPE without groups. Threads: any.
int32_t hence_equally_distributed_equivalent(const double *consumption,
                                             const double *shares,
                                             size_t n,
                                             double elasticity,
                                             double *equivalent,
                                             hence_error *error);

#ifdef __cplusplus
}  // extern "C"
#endif  // __cplusplus

#endif  /* HENCE_H */
