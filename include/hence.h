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
// the call itself was not sound.
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

// Mean yearly rates to the offsets: D(t)^(-1/t) - 1, at 0 its limit, fractions per year.
//
// In cells: HENCE.MEANRATE.
//
// Arguments, statuses and threads as hence_factors.
int32_t hence_mean_rates(const hence_basis *basis,
                         const double *offsets,
                         size_t n,
                         double *rates,
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

#ifdef __cplusplus
}  // extern "C"
#endif  // __cplusplus

#endif  /* HENCE_H */
