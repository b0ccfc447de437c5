/* The C interface of hence: discount factors, rates and present values.
 *
 * Made by cbindgen from the Rust source; not edited by hand. A function returns a status, HENCE_OK (0) when it is done,
 * and leaves its outputs untouched otherwise. The rate to use is set by the body that funds or reviews the appraisal. */

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

// A length is above HENCE_LENGTH_MAX.
#define HENCE_ERR_LENGTH 12

// Output and input overlap.
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

// What went wrong, written into the caller's own struct. Nothing in it is allocated or freed.
typedef struct {
  // In: sizeof(hence_error), set by the caller. A smaller size gets only the fields that fit.
  uint32_t struct_size;
  // Out: the status, as returned.
  int32_t code;
  // Out: the argument it is about, counted from 1; 0 where it is about none.
  int32_t argument;
  // Out: the index within that argument, or the character within a text; -1 where there is none.
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
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT. Threads: any.
int32_t hence_answer_shape(const hence_answer *answer,
                           size_t *rows,
                           size_t *columns,
                           hence_error *error);

// The cells of an answer, row by row.
//
// Arguments: `answer` (in, not NULL); `numbers` (out, `n` doubles): the number of a cell, the ERROR.TYPE number of an
// error value, 0 for a text; `kinds` (out, `n` bytes): HENCE_CELL_NUMBER, HENCE_CELL_TEXT or HENCE_CELL_ERROR; `n` (in):
// rows x columns; `error` (out, may be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT; HENCE_ERR_CAPACITY with the number of cells as index where `n`
// is another. Threads: any.
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
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_CAPACITY; HENCE_ERR_LENGTH where there is no such cell. Threads: any.
int32_t hence_answer_text(const hence_answer *answer,
                          size_t cell,
                          char *buffer,
                          size_t capacity,
                          hence_error *error);

// Parses a rate line, a rate as text, or the id of a built-in schedule.
//
// Arguments: `line` (in, NUL-ended UTF-8, borrowed, not NULL); `out` (out, not NULL): a new handle, caller
// owns (free with hence_basis_free); `error` (out, may be NULL).
// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_UTF8; HENCE_ERR_SYNTAX with the character as index;
// HENCE_ERR_SCHEDULE; HENCE_ERR_RANGE; HENCE_ERR_CONTEXT for curves with calendar edges or by project length.
// Threads: any.
int32_t hence_basis_parse(const char *line,
                          hence_basis **out,
                          hence_error *error);

// Frees a handle. NULL is allowed. Threads: no other thread may be using the handle.
void hence_basis_free(hence_basis *basis);

// The basis in words, with its source.
//
// Arguments: `basis` (in, not NULL); `buffer` (out): `capacity` bytes of the caller's, gets NUL-ended UTF-8;
// `capacity` (in); `error` (out, may be NULL). A buffer that is too small is HENCE_ERR_CAPACITY, with the bytes
// needed as index, and stays untouched.
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_CAPACITY. Threads: any.
int32_t hence_basis_describe(const hence_basis *basis,
                             char *buffer,
                             size_t capacity,
                             hence_error *error);

// Discount factors D(t), one an offset.
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
// Arguments, statuses and threads as hence_factors.
int32_t hence_forward_rates(const hence_basis *basis,
                            const double *offsets,
                            size_t n,
                            double *rates,
                            hence_error *error);

// Mean yearly rates to the offsets: D(t)^(-1/t) - 1, at 0 its limit, fractions per year.
//
// Arguments, statuses and threads as hence_factors.
int32_t hence_mean_rates(const hence_basis *basis,
                         const double *offsets,
                         size_t n,
                         double *rates,
                         hence_error *error);

// Present value of one stream: the sum of D(offset) x flow, correctly rounded from the factors.
//
// Arguments: `basis` (in, not NULL); `offsets` (in, `n` doubles, years from the base); `flows` (in, `n` doubles,
// any sign); `n` (in; 0 gives 0); `value` (out, one double, not NULL); `error` (out, may be NULL).
// Returns and threads as hence_factors.
int32_t hence_present_value(const hence_basis *basis,
                            const double *offsets,
                            const double *flows,
                            size_t n,
                            double *value,
                            hence_error *error);

// The Ramsey rate rho + eta g, a fraction per year.
//
// Arguments: `rho` (in) time preference and hazard, a fraction per year; `eta` (in) elasticity of marginal utility;
// `g` (in) growth of consumption per head, a fraction per year; `rate` (out, one double, not NULL); `error` (out, may
// be NULL).
// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE. Threads: any.
int32_t hence_ramsey_rate(double rho,
                          double eta,
                          double g,
                          double *rate,
                          hence_error *error);

// The name of a status, as static text: "HENCE_ERR_DOMAIN". Unknown numbers give "unknown status".
//
// Returns: static, never NULL, not to be freed. Threads: any.
const char *hence_status_name(int32_t code);

#ifdef __cplusplus
}  // extern "C"
#endif  // __cplusplus

#endif  /* HENCE_H */
