/* Every way to call the C interface wrongly that it promises to answer: a status, the argument and index it is about, and
 * outputs that stay as they were. Prints the number of checks; exits 1 at the first that fails. */
#include "hence.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static int checks = 0;

#define CHECK(condition)                                                                                               \
  do {                                                                                                                 \
    checks++;                                                                                                          \
    if (!(condition)) {                                                                                                \
      fprintf(stderr, "line %d: %s\n", __LINE__, #condition);                                                          \
      exit(1);                                                                                                         \
    }                                                                                                                  \
  } while (0)

/* The call has this status, about this argument and index, in the struct too. */
#define REFUSED(call, status, where, at)                                                                               \
  do {                                                                                                                 \
    memset(&error, 0x55, sizeof error);                                                                                \
    error.struct_size = sizeof error;                                                                                  \
    CHECK((call) == (status));                                                                                         \
    CHECK(error.code == (status));                                                                                     \
    CHECK(error.argument == (where));                                                                                  \
    CHECK(error.index == (at));                                                                                        \
    CHECK(strlen(error.message) > 0 && strlen(error.message) < sizeof error.message);                                  \
    CHECK(error.struct_size == sizeof error);                                                                          \
  } while (0)

/* No output of an array function is touched unless it succeeds. */
#define UNTOUCHED CHECK(out[0] == -7.0 && out[1] == -7.0 && out[2] == -7.0 && one == -7.0)

int main(void) {
  hence_error error = {0};
  hence_basis *basis = NULL;
  double t[3] = {0.0, 1.0, 2.0};
  double flows[6] = {-100.0, 60.0, 60.0, 1.0, 2.0, 3.0};
  double out[3] = {-7.0, -7.0, -7.0};
  double one = -7.0;
  double bad[3] = {0.0, 1.0, NAN};
  double endless[3] = {INFINITY, 1.0, 2.0};
  double *null = NULL;
  size_t count = 77;
  size_t huge = (size_t)HENCE_LENGTH_MAX + 1;
  char text[512];
  /* Storage for pointers that are one byte off. */
  double storage[8];
  double *odd = (double *)(void *)((char *)storage + 1);

  error.struct_size = sizeof error;
  CHECK(hence_abi_version() == HENCE_ABI_VERSION);
  CHECK(hence_basis_parse("3.5% to 30, 3% to 75", &basis, &error) == HENCE_OK);
  CHECK(basis != NULL && error.code == HENCE_OK && error.index == -1 && error.message[0] == '\0');

  /* Texts and handles. */
  hence_basis *none = NULL;
  REFUSED(hence_basis_parse(NULL, &none, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_basis_parse("3.5%", NULL, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_basis_parse("3.5%", (hence_basis **)(void *)odd, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_basis_parse("3.5% \xff", &none, &error), HENCE_ERR_UTF8, 1, 5);
  REFUSED(hence_basis_parse("3.5% until 30", &none, &error), HENCE_ERR_SYNTAX, 1, 5);
  REFUSED(hence_basis_parse("", &none, &error), HENCE_ERR_SYNTAX, 1, 0);
  REFUSED(hence_basis_parse("uk-1066", &none, &error), HENCE_ERR_SCHEDULE, 1, 0);
  REFUSED(hence_basis_parse("350%", &none, &error), HENCE_ERR_RANGE, 1, 0);
  CHECK(hence_basis_parse("2.5% to 2070, 1.5% after", &none, &error) == HENCE_ERR_CONTEXT && error.argument == 1);
  REFUSED(hence_basis_parse_at("3.5%", 26, 0.0, &none, &error), HENCE_ERR_RANGE, 2, -1);
  REFUSED(hence_basis_parse_at("3.5%", 2026, -1.0, &none, &error), HENCE_ERR_RANGE, 3, -1);
  REFUSED(hence_basis_parse_at("3.5%", 2026, NAN, &none, &error), HENCE_ERR_NOT_FINITE, 3, -1);
  REFUSED(hence_basis_parse_at("3.5%", 2026, 1.0, NULL, &error), HENCE_ERR_NULL, 4, -1);
  REFUSED(hence_basis_parse_at(NULL, 2026, 1.0, &none, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_basis_parse_at("3.5%", 2026, 1.0, (hence_basis **)(void *)odd, &error), HENCE_ERR_ALIGNMENT, 4, -1);
  REFUSED(hence_basis_parse_at("2.5% to 2070, 1.5% after", 0, 0.0, &none, &error), HENCE_ERR_CONTEXT, 2, -1);
  REFUSED(hence_basis_parse_at("1% to 5, 3.5% to 2020, 1% after", 2026, 0.0, &none, &error), HENCE_ERR_RANGE, 1, -1);
  REFUSED(hence_basis_parse_at("3% to 10, 2% to 30; whole horizon by length", 0, 0.0, &none, &error), HENCE_ERR_CONTEXT, 3, -1);
  REFUSED(hence_basis_parse_at("3% to 10, 2% to 30; whole horizon by length", 0, 31.0, &none, &error), HENCE_ERR_DOMAIN, 3, -1);
  CHECK(none == NULL);
  CHECK(hence_basis_parse_at("2.5% to 2070, 1.5% after", 2026, 0.0, &none, &error) == HENCE_OK);
  hence_basis_free(none);
  hence_basis_free(NULL);
  /* A text of a megabyte that is no basis. */
  char *long_text = malloc(1 << 20);
  memset(long_text, '9', (1 << 20) - 1);
  long_text[(1 << 20) - 1] = '\0';
  none = NULL;
  CHECK(hence_basis_parse(long_text, &none, &error) != HENCE_OK && none == NULL);
  free(long_text);

  /* A handle that is not aligned is none. */
  hence_basis *askew = (hence_basis *)(void *)((char *)basis + 1);
  REFUSED(hence_factors(askew, t, 3, out, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_present_value(askew, t, flows, 3, &one, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_present_values(askew, t, flows, 2, 3, out, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_annual_equivalent(askew, 1.0, 3, &one, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_basis_line(askew, text, sizeof text, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  UNTOUCHED;

  /* Texts out. */
  memset(text, 'x', sizeof text);
  REFUSED(hence_basis_describe(NULL, text, sizeof text, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_basis_describe(basis, NULL, sizeof text, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_basis_line(basis, text, 20, &error), HENCE_ERR_CAPACITY, 3, 21);
  REFUSED(hence_basis_line(basis, text, 0, &error), HENCE_ERR_CAPACITY, 3, 21);
  REFUSED(hence_basis_line(basis, NULL, 0, &error), HENCE_ERR_CAPACITY, 3, 21);
  CHECK(text[0] == 'x' && text[19] == 'x');
  CHECK(hence_basis_line(basis, text, 21, &error) == HENCE_OK && strcmp(text, "3.5% to 30, 3% to 75") == 0);
  CHECK(text[21] == 'x');
  REFUSED(hence_basis_timing(basis, text, 3, &error), HENCE_ERR_CAPACITY, 3, 20);
  CHECK(hence_basis_timing(basis, text, sizeof text, &error) == HENCE_OK && strcmp(text, "flows end, base end") == 0);
  CHECK(hence_basis_parse("3.5%; flows middle", &none, &error) == HENCE_OK);
  CHECK(hence_basis_timing(none, text, sizeof text, &error) == HENCE_OK && strcmp(text, "flows middle, base end") == 0);
  hence_basis_free(none);
  none = NULL;
  REFUSED(hence_schedule_line("uk-1066", text, sizeof text, &error), HENCE_ERR_SCHEDULE, 1, -1);
  REFUSED(hence_schedule_line(NULL, text, sizeof text, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_schedule_line("\xc3\x28", text, sizeof text, &error), HENCE_ERR_UTF8, 1, 0);

  /* Arrays along the curve. */
  int32_t (*along[4])(const hence_basis *, const double *, size_t, double *, hence_error *) = {
      hence_factors, hence_forward_rates, hence_mean_rates, hence_instantaneous_rates};
  for (int i = 0; i < 4; i++) {
    double past[3] = {1.0, 2.0, 75.5};
    REFUSED(along[i](NULL, t, 3, out, &error), HENCE_ERR_NULL, 1, -1);
    REFUSED(along[i](basis, NULL, 3, out, &error), HENCE_ERR_NULL, 2, -1);
    REFUSED(along[i](basis, t, 3, NULL, &error), HENCE_ERR_NULL, 4, -1);
    REFUSED(along[i](basis, odd, 3, out, &error), HENCE_ERR_ALIGNMENT, 2, -1);
    REFUSED(along[i](basis, t, 3, odd, &error), HENCE_ERR_ALIGNMENT, 4, -1);
    REFUSED(along[i](basis, t, huge, out, &error), HENCE_ERR_LENGTH, 3, -1);
    REFUSED(along[i](basis, t, SIZE_MAX, out, &error), HENCE_ERR_LENGTH, 3, -1);
    REFUSED(along[i](basis, bad, 3, out, &error), HENCE_ERR_NOT_FINITE, 2, 2);
    REFUSED(along[i](basis, endless, 3, out, &error), HENCE_ERR_NOT_FINITE, 2, 0);
    REFUSED(along[i](basis, past, 3, out, &error), HENCE_ERR_DOMAIN, 2, 2);
    REFUSED(along[i](basis, t, 3, t, &error), HENCE_ERR_OVERLAP, 4, -1);
    REFUSED(along[i](basis, t, 2, t + 1, &error), HENCE_ERR_OVERLAP, 4, -1);
    CHECK(t[0] == 0.0 && t[1] == 1.0 && t[2] == 2.0);
    UNTOUCHED;
    CHECK(along[i](basis, NULL, 0, NULL, &error) == HENCE_OK);
    CHECK(along[i](basis, NULL, 0, out, NULL) == HENCE_OK);
    /* Neighbours that only touch do not overlap. */
    double both[4] = {1.0, 2.0, -7.0, -7.0};
    CHECK(along[i](basis, both, 2, both + 2, &error) == HENCE_OK && both[2] > 0.0 && both[3] > 0.0);
  }

  /* Present values. */
  REFUSED(hence_present_value(NULL, t, flows, 3, &one, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_present_value(basis, null, flows, 3, &one, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_present_value(basis, t, null, 3, &one, &error), HENCE_ERR_NULL, 3, -1);
  REFUSED(hence_present_value(basis, t, flows, 3, NULL, &error), HENCE_ERR_NULL, 5, -1);
  REFUSED(hence_present_value(basis, t, odd, 3, &one, &error), HENCE_ERR_ALIGNMENT, 3, -1);
  REFUSED(hence_present_value(basis, t, flows, 3, odd, &error), HENCE_ERR_ALIGNMENT, 5, -1);
  REFUSED(hence_present_value(basis, t, flows, huge, &one, &error), HENCE_ERR_LENGTH, 4, -1);
  REFUSED(hence_present_value(basis, t, bad, 3, &one, &error), HENCE_ERR_NOT_FINITE, 3, 2);
  REFUSED(hence_present_value(basis, bad, flows, 3, &one, &error), HENCE_ERR_NOT_FINITE, 2, 2);
  {
    double large[2] = {1.7e308, 1.7e308};
    double zero[2] = {0.0, 0.0};
    CHECK(hence_present_value(basis, zero, large, 2, &one, &error) == HENCE_ERR_NOT_FINITE && error.argument == 3);
    CHECK(hence_present_values(basis, zero, large, 1, 2, &one, &error) == HENCE_ERR_NOT_FINITE && error.index == 0);
  }
  REFUSED(hence_present_value(basis, odd, flows, 3, &one, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_present_value(basis, t, flows, 3, t + 2, &error), HENCE_ERR_OVERLAP, 5, -1);
  REFUSED(hence_present_value(basis, t, flows, 3, flows, &error), HENCE_ERR_OVERLAP, 5, -1);
  CHECK(t[2] == 2.0 && flows[0] == -100.0);
  UNTOUCHED;
  CHECK(hence_present_value(basis, NULL, NULL, 0, &one, &error) == HENCE_OK && one == 0.0);
  one = -7.0;
  REFUSED(hence_present_values(basis, t, flows, 2, 3, NULL, &error), HENCE_ERR_NULL, 6, -1);
  REFUSED(hence_present_values(basis, t, null, 2, 3, out, &error), HENCE_ERR_NULL, 3, -1);
  REFUSED(hence_present_values(NULL, t, flows, 2, 3, out, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_present_values(basis, null, flows, 2, 3, out, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_present_values(basis, odd, flows, 2, 3, out, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_present_values(basis, t, odd, 2, 3, out, &error), HENCE_ERR_ALIGNMENT, 3, -1);
  REFUSED(hence_present_values(basis, t, flows, 2, 3, odd, &error), HENCE_ERR_ALIGNMENT, 6, -1);
  REFUSED(hence_present_values(basis, bad, flows, 2, 3, out, &error), HENCE_ERR_NOT_FINITE, 2, 2);
  REFUSED(hence_present_values(basis, t, flows, huge, 3, out, &error), HENCE_ERR_LENGTH, 4, -1);
  REFUSED(hence_present_values(basis, t, flows, SIZE_MAX, SIZE_MAX, out, &error), HENCE_ERR_LENGTH, 5, -1);
  REFUSED(hence_present_values(basis, t, flows, 2, huge, out, &error), HENCE_ERR_LENGTH, 5, -1);
  REFUSED(hence_present_values(basis, t, flows, 1 << 20, 1 << 20, out, &error), HENCE_ERR_LENGTH, 4, -1);
  REFUSED(hence_present_values(basis, t, flows, 2, 3, flows + 5, &error), HENCE_ERR_OVERLAP, 6, -1);
  REFUSED(hence_present_values(basis, t, flows, 1, 3, t + 2, &error), HENCE_ERR_OVERLAP, 6, -1);
  flows[4] = NAN;
  REFUSED(hence_present_values(basis, t, flows, 2, 3, out, &error), HENCE_ERR_NOT_FINITE, 3, 4);
  flows[4] = 2.0;
  UNTOUCHED;
  CHECK(hence_present_values(basis, NULL, NULL, 2, 0, out, &error) == HENCE_OK && out[0] == 0.0 && out[1] == 0.0);
  out[0] = out[1] = -7.0;
  CHECK(hence_present_values(basis, t, NULL, 0, 3, NULL, &error) == HENCE_OK);

  /* Annual equivalents. */
  REFUSED(hence_annual_equivalent(NULL, 1.0, 3, &one, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_annual_equivalent(basis, NAN, 3, &one, &error), HENCE_ERR_NOT_FINITE, 2, -1);
  REFUSED(hence_annual_equivalent(basis, 1.0, 0, &one, &error), HENCE_ERR_NO_MEANING, 3, -1);
  REFUSED(hence_annual_equivalent(basis, 1.0, -3, &one, &error), HENCE_ERR_NO_MEANING, 3, -1);
  REFUSED(hence_annual_equivalent(basis, 1.0, 100001, &one, &error), HENCE_ERR_NO_MEANING, 3, -1);
  CHECK(hence_annual_equivalent(basis, 1.0, 76, &one, &error) == HENCE_ERR_DOMAIN);
  REFUSED(hence_annual_equivalent(basis, 1.0, INT32_MIN, &one, &error), HENCE_ERR_NO_MEANING, 3, -1);
  REFUSED(hence_annual_equivalent(basis, 1.0, 3, NULL, &error), HENCE_ERR_NULL, 4, -1);
  REFUSED(hence_annual_equivalent(basis, 1.0, 3, odd, &error), HENCE_ERR_ALIGNMENT, 4, -1);
  UNTOUCHED;

  /* Rates of return: at 10% and 20%. */
  double two[3] = {-100.0, 230.0, -132.0};
  REFUSED(hence_irr_all(NULL, two, 3, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_irr_all(t, NULL, 3, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_irr_all(t, two, huge, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_LENGTH, 3, -1);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, out, huge, &count, &error), HENCE_ERR_LENGTH, 7, -1);
  REFUSED(hence_irr_all(t, two, 0, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_SHAPE, 3, -1);
  REFUSED(hence_irr_all(t, two, 3, NAN, 1.0, out, 3, &count, &error), HENCE_ERR_NOT_FINITE, 4, -1);
  REFUSED(hence_irr_all(t, two, 3, -0.5, INFINITY, out, 3, &count, &error), HENCE_ERR_NOT_FINITE, 5, -1);
  CHECK(hence_irr_all(t, two, 3, 1.0, -0.5, out, 3, &count, &error) == HENCE_ERR_RANGE && error.argument == 4);
  CHECK(hence_irr_all(t, two, 3, -1.0, 1.0, out, 3, &count, &error) == HENCE_ERR_RANGE);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, NULL, 3, &count, &error), HENCE_ERR_NULL, 6, -1);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, out, 3, NULL, &error), HENCE_ERR_NULL, 8, -1);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, out, 1, &count, &error), HENCE_ERR_CAPACITY, 7, 2);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, NULL, 0, &count, &error), HENCE_ERR_CAPACITY, 7, 2);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, t + 1, 2, &count, &error), HENCE_ERR_OVERLAP, 6, -1);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, two + 2, 1, &count, &error), HENCE_ERR_OVERLAP, 6, -1);
  {
    /* Outputs against each other and against the inputs. */
    void *places[3] = {t + 2, two, out + 1};
    for (int i = 0; i < 3; i++) {
      REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, out, 3, places[i], &error), HENCE_ERR_OVERLAP, 8, -1);
    }
    CHECK(t[2] == 2.0 && two[0] == -100.0);
  }
  REFUSED(hence_irr_all(odd, two, 3, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_irr_all(t, odd, 3, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, odd, 3, &count, &error), HENCE_ERR_ALIGNMENT, 6, -1);
  REFUSED(hence_irr_all(t, two, 3, -0.5, 1.0, out, 3, (void *)odd, &error), HENCE_ERR_ALIGNMENT, 8, -1);
  REFUSED(hence_irr_all(bad, two, 3, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_NOT_FINITE, 1, 2);
  REFUSED(hence_irr_all(t, endless, 3, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_NOT_FINITE, 2, 0);
  {
    double touching[3] = {100.0, -220.0, 121.0};
    REFUSED(hence_irr_all(t, touching, 3, -0.5, 1.0, out, 3, &count, &error), HENCE_ERR_NO_MEANING, 2, -1);
    double nothing[3] = {0.0, 0.0, 0.0};
    CHECK(hence_irr_all(t, nothing, 3, -0.5, 1.0, out, 3, &count, &error) == HENCE_ERR_NO_MEANING);
  }
  UNTOUCHED;
  CHECK(count == 77);
  CHECK(hence_irr_all(t, two, 3, -0.5, 1.0, out, 3, &count, &error) == HENCE_OK && count == 2);
  CHECK(fabs(out[0] - 0.1) < 1e-12 && fabs(out[1] - 0.2) < 1e-12 && out[2] == -7.0);
  CHECK(hence_irr_all(t, flows, 3, 0.5, 1.0, NULL, 0, &count, &error) == HENCE_OK && count == 0);
  out[0] = out[1] = -7.0;

  /* Offsets. */
  REFUSED(hence_offsets_from_years(NULL, 3, 0.0, NULL, out, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_offsets_from_years(bad, 3, 0.0, NULL, out, &error), HENCE_ERR_NOT_FINITE, 1, 2);
  REFUSED(hence_offsets_from_years(t, 3, NAN, NULL, out, &error), HENCE_ERR_NOT_FINITE, 3, -1);
  REFUSED(hence_offsets_from_years(t, 3, 0.0, "flows late", out, &error), HENCE_ERR_SYNTAX, 4, 0);
  REFUSED(hence_offsets_from_years(t, 3, 0.0, "\xff", out, &error), HENCE_ERR_UTF8, 4, 0);
  REFUSED(hence_offsets_from_years(t, 3, 0.0, "flows averaged", out, &error), HENCE_ERR_UNSUPPORTED, 4, -1);
  REFUSED(hence_offsets_from_years(t, 3, 0.0, "base averaged", out, &error), HENCE_ERR_NO_MEANING, 4, 0);
  REFUSED(hence_offsets_from_years(odd, 3, 0.0, NULL, out, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_offsets_from_years(t, huge, 0.0, NULL, out, &error), HENCE_ERR_LENGTH, 2, -1);
  REFUSED(hence_offsets_from_years(t, 3, 0.0, NULL, odd, &error), HENCE_ERR_ALIGNMENT, 5, -1);
  {
    double far[2] = {0.0, 1.7e308};
    REFUSED(hence_offsets_from_years(far, 2, -1.7e308, NULL, out, &error), HENCE_ERR_NOT_FINITE, 1, 1);
  }
  REFUSED(hence_offsets_from_years(t, 3, 0.0, NULL, NULL, &error), HENCE_ERR_NULL, 5, -1);
  REFUSED(hence_offsets_from_years(t, 3, 0.0, NULL, t, &error), HENCE_ERR_OVERLAP, 5, -1);
  int32_t dates[3] = {20260401, 20270401, 20270230};
  REFUSED(hence_offsets_from_dates(NULL, 3, 20260401, NULL, out, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_offsets_from_dates(dates, 3, 20260401, NULL, out, &error), HENCE_ERR_SYNTAX, 1, 2);
  REFUSED(hence_offsets_from_dates(dates, 2, 2026, NULL, out, &error), HENCE_ERR_SYNTAX, 3, -1);
  CHECK(hence_offsets_from_dates(dates, 2, 20260401, "lunar", out, &error) == HENCE_ERR_SYNTAX && error.argument == 4);
  REFUSED(hence_offsets_from_dates((int32_t *)(void *)odd, 2, 20260401, NULL, out, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_offsets_from_dates(dates, huge, 20260401, NULL, out, &error), HENCE_ERR_LENGTH, 2, -1);
  REFUSED(hence_offsets_from_dates(dates, 2, 20260401, "\xff", out, &error), HENCE_ERR_UTF8, 4, 0);
  REFUSED(hence_offsets_from_dates(dates, 2, 20260401, NULL, odd, &error), HENCE_ERR_ALIGNMENT, 5, -1);
  {
    union {
      int32_t in[6];
      double out[3];
    } shared = {{20260401, 20270401, 0, 0, 0, 0}};
    REFUSED(hence_offsets_from_dates(shared.in, 2, 20260401, NULL, shared.out, &error), HENCE_ERR_OVERLAP, 5, -1);
    CHECK(shared.in[0] == 20260401 && shared.in[1] == 20270401);
  }
  REFUSED(hence_offsets_from_dates(dates, 2, 20260401, NULL, NULL, &error), HENCE_ERR_NULL, 5, -1);
  UNTOUCHED;
  CHECK(hence_offsets_from_dates(dates, 2, 20260401, NULL, out, &error) == HENCE_OK && out[0] == 0.0 && out[1] == 1.0);
  out[0] = out[1] = -7.0;

  /* Single numbers. */
  REFUSED(hence_ramsey_rate(NAN, 1.0, 0.02, &one, &error), HENCE_ERR_NOT_FINITE, 1, -1);
  REFUSED(hence_ramsey_rate(0.01, 21.0, 0.02, &one, &error), HENCE_ERR_RANGE, 2, -1);
  REFUSED(hence_ramsey_rate(0.01, 1.0, INFINITY, &one, &error), HENCE_ERR_NOT_FINITE, 3, -1);
  REFUSED(hence_ramsey_rate(0.01, 1.0, 0.02, NULL, &error), HENCE_ERR_NULL, 4, -1);
  REFUSED(hence_ramsey_rate_uncertain(0.01, 1.0, 0.02, -0.1, &one, &error), HENCE_ERR_RANGE, 4, -1);
  REFUSED(hence_ramsey_rate_uncertain(0.01, 1.0, 0.02, 0.1, NULL, &error), HENCE_ERR_NULL, 5, -1);
  REFUSED(hence_elasticity_from_taxes(40.0, 0.25, &one, &error), HENCE_ERR_RANGE, 1, -1);
  REFUSED(hence_elasticity_from_taxes(0.4, 0.0, &one, &error), HENCE_ERR_RANGE, 2, -1);
  REFUSED(hence_elasticity_from_taxes(0.4, 0.25, odd, &error), HENCE_ERR_ALIGNMENT, 3, -1);
  REFUSED(hence_equity_weight(0.0, 1.0, 1.0, &one, &error), HENCE_ERR_NO_MEANING, 1, -1);
  REFUSED(hence_equity_weight(1.0, NAN, 1.0, &one, &error), HENCE_ERR_NOT_FINITE, 2, -1);
  REFUSED(hence_equity_weight(1.0, 1.0, 21.0, &one, &error), HENCE_ERR_RANGE, 3, -1);
  REFUSED(hence_real_rate(0.05, -1.0, &one, &error), HENCE_ERR_RANGE, 2, -1);
  REFUSED(hence_real_rate(0.05, 0.02, NULL, &error), HENCE_ERR_NULL, 3, -1);
  REFUSED(hence_hazard_from_probability(1.0, 0, &one, &error), HENCE_ERR_RANGE, 1, -1);
  REFUSED(hence_hazard_from_probability(NAN, 0, &one, &error), HENCE_ERR_NOT_FINITE, 1, -1);
  REFUSED(hence_hazard_from_probability(0.01, 2, &one, &error), HENCE_ERR_RANGE, 2, -1);
  REFUSED(hence_hazard_from_probability(0.01, 0, NULL, &error), HENCE_ERR_NULL, 3, -1);
  REFUSED(hence_hazard_from_waiting_time(1.0, HENCE_COMPOUNDING_YEARLY, &one, &error), HENCE_ERR_RANGE, 1, -1);
  REFUSED(hence_hazard_from_waiting_time(0.0, HENCE_COMPOUNDING_CONTINUOUS, &one, &error), HENCE_ERR_RANGE, 1, -1);
  REFUSED(hence_hazard_from_waiting_time(INFINITY, 0, &one, &error), HENCE_ERR_NOT_FINITE, 1, -1);
  REFUSED(hence_hazard_from_waiting_time(100.0, -1, &one, &error), HENCE_ERR_RANGE, 2, -1);
  REFUSED(hence_hazard_from_waiting_time(100.0, 0, odd, &error), HENCE_ERR_ALIGNMENT, 3, -1);
  int32_t (*of_consumption[2])(double, double, double *, hence_error *) = {hence_utility, hence_marginal_utility};
  for (int i = 0; i < 2; i++) {
    REFUSED(of_consumption[i](0.0, 1.0, &one, &error), HENCE_ERR_NO_MEANING, 1, -1);
    REFUSED(of_consumption[i](NAN, 1.0, &one, &error), HENCE_ERR_NOT_FINITE, 1, -1);
    REFUSED(of_consumption[i](2.0, 21.0, &one, &error), HENCE_ERR_RANGE, 2, -1);
    REFUSED(of_consumption[i](2.0, 1.0, NULL, &error), HENCE_ERR_NULL, 3, -1);
    REFUSED(of_consumption[i](2.0, 1.0, odd, &error), HENCE_ERR_ALIGNMENT, 3, -1);
  }
  REFUSED(hence_compensation(NAN, 4.0, 4.0, 1.0, 0.25, 2.0, 0, &one, &error), HENCE_ERR_NOT_FINITE, 1, -1);
  REFUSED(hence_compensation(4.0, 4.0, 4.0, 1.0, 0.25, 2.0, 0, &one, &error), HENCE_ERR_NO_MEANING, 1, -1);
  REFUSED(hence_compensation(2.0, 4.0, 4.0, 1.0, 0.25, 2.0, 0, &one, &error), HENCE_ERR_NO_MEANING, 1, -1);
  REFUSED(hence_compensation(0.8, 0.0, 4.0, 1.0, 0.25, 2.0, 0, &one, &error), HENCE_ERR_NO_MEANING, 2, -1);
  REFUSED(hence_compensation(0.8, 4.0, -1.0, 1.0, 0.25, 2.0, 0, &one, &error), HENCE_ERR_NO_MEANING, 3, -1);
  REFUSED(hence_compensation(0.8, 4.0, 4.0, NAN, 0.25, 2.0, 0, &one, &error), HENCE_ERR_NOT_FINITE, 4, -1);
  REFUSED(hence_compensation(0.8, 4.0, 4.0, 1.0, -1.0, 2.0, 0, &one, &error), HENCE_ERR_RANGE, 5, -1);
  REFUSED(hence_compensation(0.8, 4.0, 4.0, 1.0, 0.25, 21.0, 0, &one, &error), HENCE_ERR_RANGE, 6, -1);
  REFUSED(hence_compensation(0.8, 4.0, 4.0, 1.0, 0.25, 2.0, 7, &one, &error), HENCE_ERR_RANGE, 7, -1);
  REFUSED(hence_compensation(0.8, 4.0, 4.0, 1.0, 0.25, 2.0, 0, NULL, &error), HENCE_ERR_NULL, 8, -1);
  REFUSED(hence_switching_multiplier(NAN, 1.0, &one, &error), HENCE_ERR_NOT_FINITE, 1, -1);
  REFUSED(hence_switching_multiplier(1.0, INFINITY, &one, &error), HENCE_ERR_NOT_FINITE, 2, -1);
  REFUSED(hence_switching_multiplier(1.0, 0.0, &one, &error), HENCE_ERR_NO_MEANING, 2, -1);
  REFUSED(hence_switching_multiplier(1.0, 1.0, NULL, &error), HENCE_ERR_NULL, 3, -1);
  UNTOUCHED;

  /* Paths of consumption, groups and brackets: arrays that are alike. */
  double c[3] = {4.0, 4.0, 5.0};
  double none_left[3] = {4.0, 0.0, 5.0};
  double shares[3] = {0.5, 0.25, 0.25};
  double negative[3] = {0.5, 0.75, -0.25};
  double half[3] = {0.5, 0.5, 0.5};
  REFUSED(hence_welfare(NULL, t, 3, 0.01, 1.5, 0, &one, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_welfare(c, NULL, 3, 0.01, 1.5, 0, &one, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_welfare(c, odd, 3, 0.01, 1.5, 0, &one, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_welfare(c, t, huge, 0.01, 1.5, 0, &one, &error), HENCE_ERR_LENGTH, 3, -1);
  REFUSED(hence_welfare(c, bad, 3, 0.01, 1.5, 0, &one, &error), HENCE_ERR_NOT_FINITE, 2, 2);
  REFUSED(hence_welfare(none_left, t, 3, 0.01, 1.5, 0, &one, &error), HENCE_ERR_NO_MEANING, 1, 1);
  REFUSED(hence_welfare(c, t, 3, -1.0, 1.5, 0, &one, &error), HENCE_ERR_RANGE, 4, -1);
  REFUSED(hence_welfare(c, t, 3, NAN, 1.5, 1, &one, &error), HENCE_ERR_NOT_FINITE, 4, -1);
  REFUSED(hence_welfare(c, t, 3, 0.01, -1.0, 0, &one, &error), HENCE_ERR_RANGE, 5, -1);
  REFUSED(hence_welfare(c, t, 3, 0.01, 1.5, 2, &one, &error), HENCE_ERR_RANGE, 6, -1);
  REFUSED(hence_welfare(c, t, 3, 0.01, 1.5, 0, NULL, &error), HENCE_ERR_NULL, 7, -1);
  REFUSED(hence_welfare(c, t, 3, 0.01, 1.5, 0, c + 2, &error), HENCE_ERR_OVERLAP, 7, -1);
  REFUSED(hence_welfare(c, t, 3, 0.01, 1.5, 0, t, &error), HENCE_ERR_OVERLAP, 7, -1);
  REFUSED(hence_welfare_factors(NULL, t, 3, 4.0, 0.01, 1.5, 0, out, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_welfare_factors(c, odd, 3, 4.0, 0.01, 1.5, 0, out, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_welfare_factors(c, t, huge, 4.0, 0.01, 1.5, 0, out, &error), HENCE_ERR_LENGTH, 3, -1);
  REFUSED(hence_welfare_factors(none_left, t, 3, 4.0, 0.01, 1.5, 0, out, &error), HENCE_ERR_NO_MEANING, 1, 1);
  REFUSED(hence_welfare_factors(c, t, 3, 0.0, 0.01, 1.5, 0, out, &error), HENCE_ERR_NO_MEANING, 4, -1);
  REFUSED(hence_welfare_factors(c, t, 3, 4.0, -1.0, 1.5, 0, out, &error), HENCE_ERR_RANGE, 5, -1);
  REFUSED(hence_welfare_factors(c, t, 3, 4.0, 0.01, 21.0, 0, out, &error), HENCE_ERR_RANGE, 6, -1);
  REFUSED(hence_welfare_factors(c, t, 3, 4.0, 0.01, 1.5, -1, out, &error), HENCE_ERR_RANGE, 7, -1);
  REFUSED(hence_welfare_factors(c, t, 3, 4.0, 0.01, 1.5, 0, NULL, &error), HENCE_ERR_NULL, 8, -1);
  REFUSED(hence_welfare_factors(c, t, 3, 4.0, 0.01, 1.5, 0, c, &error), HENCE_ERR_OVERLAP, 8, -1);
  REFUSED(hence_welfare_factors(c, t, 2, 4.0, 0.01, 1.5, 0, t + 1, &error), HENCE_ERR_OVERLAP, 8, -1);
  for (int i = 0; i < 2; i++) {
#define EXACT(x, c, d, n, base, eta, value)                                                                            \
  (i == 0 ? hence_equivalent_variation(x, c, d, n, base, eta, value, &error)                                           \
          : hence_compensating_variation(x, c, d, n, base, 0.0, eta, value, &error))
    double x[3] = {1.0, -1.0, 1.0};
    double ruin[3] = {1.0, -4.0, 1.0};
    double below[3] = {1.0, 1.0, -1.0};
    REFUSED(EXACT(NULL, c, half, 3, 4.0, 2.0, &one), HENCE_ERR_NULL, 1, -1);
    REFUSED(EXACT(x, NULL, half, 3, 4.0, 2.0, &one), HENCE_ERR_NULL, 2, -1);
    REFUSED(EXACT(x, c, odd, 3, 4.0, 2.0, &one), HENCE_ERR_ALIGNMENT, 3, -1);
    REFUSED(EXACT(x, c, half, huge, 4.0, 2.0, &one), HENCE_ERR_LENGTH, 4, -1);
    REFUSED(EXACT(bad, c, half, 3, 4.0, 2.0, &one), HENCE_ERR_NOT_FINITE, 1, 2);
    REFUSED(EXACT(ruin, c, half, 3, 4.0, 2.0, &one), HENCE_ERR_NO_MEANING, 1, 1);
    REFUSED(EXACT(x, none_left, half, 3, 4.0, 2.0, &one), HENCE_ERR_NO_MEANING, 2, 1);
    REFUSED(EXACT(x, c, below, 3, 4.0, 2.0, &one), HENCE_ERR_NO_MEANING, 3, 2);
    REFUSED(EXACT(x, c, half, 3, 0.0, 2.0, &one), HENCE_ERR_NO_MEANING, 5, -1);
    REFUSED(EXACT(x, c, half, 3, 4.0, 21.0, &one), HENCE_ERR_RANGE, 6 + i, -1);
    REFUSED(EXACT(x, c, half, 3, 4.0, 2.0, NULL), HENCE_ERR_NULL, 7 + i, -1);
    REFUSED(EXACT(x, c, half, 3, 4.0, 2.0, half + 1), HENCE_ERR_OVERLAP, 7 + i, -1);
    UNTOUCHED;
    CHECK(EXACT(NULL, NULL, NULL, 0, 4.0, 2.0, &one) == HENCE_OK && one == 0.0);
    one = -7.0;
  }
  {
    /* So great a gain that no amount at the base is worth as much; a flow that leaves nothing at the base. */
    double gain = 400.0, before = 4.0, factor = 2.0;
    REFUSED(hence_equivalent_variation(&gain, &before, &factor, 1, 4.0, 2.0, &one, &error), HENCE_ERR_NO_MEANING, 1, -1);
    REFUSED(hence_compensating_variation(&gain, &before, &factor, 1, 4.0, -4.0, 2.0, &one, &error), HENCE_ERR_NO_MEANING, 6, -1);
    REFUSED(hence_compensating_variation(&gain, &before, &factor, 1, 4.0, NAN, 2.0, &one, &error), HENCE_ERR_NOT_FINITE, 6, -1);
  }
  REFUSED(hence_equally_distributed_equivalent(NULL, shares, 3, 1.0, &one, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_equally_distributed_equivalent(c, odd, 3, 1.0, &one, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_equally_distributed_equivalent(c, shares, huge, 1.0, &one, &error), HENCE_ERR_LENGTH, 3, -1);
  REFUSED(hence_equally_distributed_equivalent(c, shares, 0, 1.0, &one, &error), HENCE_ERR_SHAPE, 1, -1);
  REFUSED(hence_equally_distributed_equivalent(none_left, shares, 3, 1.0, &one, &error), HENCE_ERR_NO_MEANING, 1, 1);
  REFUSED(hence_equally_distributed_equivalent(c, negative, 3, 1.0, &one, &error), HENCE_ERR_RANGE, 2, 2);
  REFUSED(hence_equally_distributed_equivalent(c, half, 3, 1.0, &one, &error), HENCE_ERR_RANGE, 2, -1);
  REFUSED(hence_equally_distributed_equivalent(c, shares, 3, NAN, &one, &error), HENCE_ERR_NOT_FINITE, 4, -1);
  REFUSED(hence_equally_distributed_equivalent(c, shares, 3, 1.0, shares, &error), HENCE_ERR_OVERLAP, 5, -1);
  REFUSED(hence_elasticity_from_brackets(NULL, half, shares, 3, &one, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_elasticity_from_brackets(half, odd, shares, 3, &one, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_elasticity_from_brackets(half, half, shares, huge, &one, &error), HENCE_ERR_LENGTH, 4, -1);
  REFUSED(hence_elasticity_from_brackets(half, half, shares, 0, &one, &error), HENCE_ERR_SHAPE, 4, -1);
  REFUSED(hence_elasticity_from_brackets(c, half, shares, 3, &one, &error), HENCE_ERR_RANGE, 1, 0);
  REFUSED(hence_elasticity_from_brackets(half, negative, shares, 3, &one, &error), HENCE_ERR_RANGE, 2, 2);
  REFUSED(hence_elasticity_from_brackets(half, half, bad, 3, &one, &error), HENCE_ERR_NOT_FINITE, 3, 2);
  REFUSED(hence_elasticity_from_brackets(half, half, negative, 3, &one, &error), HENCE_ERR_RANGE, 3, 2);
  {
    double nobody[3] = {0.0, 0.0, 0.0};
    REFUSED(hence_elasticity_from_brackets(half, half, nobody, 3, &one, &error), HENCE_ERR_RANGE, 3, -1);
  }
  REFUSED(hence_elasticity_from_brackets(half, half, shares, 3, shares + 2, &error), HENCE_ERR_OVERLAP, 5, -1);
  REFUSED(hence_elasticity_from_brackets(half, half, shares, 3, NULL, &error), HENCE_ERR_NULL, 5, -1);
  CHECK(c[2] == 5.0 && t[0] == 0.0 && shares[0] == 0.5 && half[1] == 0.5);
  UNTOUCHED;

  /* Growth of a series, into a struct that says its size. */
  {
    double series[5] = {1.0, 1.5, 1.75, 2.5, 2.75};
    int32_t dated[5] = {2020, 2021, 2022, 2023, 2025};
    union {
      hence_growth growth;
      unsigned char bytes[sizeof(hence_growth) + 8];
    } room;
    hence_growth *growth = &room.growth;
    memset(&room, 0xaa, sizeof room);
    growth->struct_size = sizeof *growth;
    REFUSED(hence_growth_estimate(NULL, NULL, 5, growth, &error), HENCE_ERR_NULL, 1, -1);
    REFUSED(hence_growth_estimate(odd, NULL, 5, growth, &error), HENCE_ERR_ALIGNMENT, 1, -1);
    REFUSED(hence_growth_estimate(series, (int32_t *)(void *)((char *)dated + 1), 4, growth, &error), HENCE_ERR_ALIGNMENT, 2, -1);
    REFUSED(hence_growth_estimate(series, NULL, huge, growth, &error), HENCE_ERR_LENGTH, 3, -1);
    REFUSED(hence_growth_estimate(series, NULL, 3, growth, &error), HENCE_ERR_SHAPE, 1, -1);
    REFUSED(hence_growth_estimate(series, NULL, 0, growth, &error), HENCE_ERR_SHAPE, 1, -1);
    REFUSED(hence_growth_estimate(series, dated, 5, growth, &error), HENCE_ERR_SYNTAX, 2, 4);
    REFUSED(hence_growth_estimate(series, NULL, 5, NULL, &error), HENCE_ERR_NULL, 4, -1);
    REFUSED(hence_growth_estimate(series, NULL, 5, (hence_growth *)(void *)((char *)growth + 1), &error), HENCE_ERR_ALIGNMENT, 4, -1);
    REFUSED(hence_growth_estimate((double *)(void *)growth, NULL, 5, growth, &error), HENCE_ERR_OVERLAP, 4, -1);
    REFUSED(hence_growth_estimate(series, (int32_t *)(void *)growth, 5, growth, &error), HENCE_ERR_OVERLAP, 4, -1);
    series[2] = 0.0;
    REFUSED(hence_growth_estimate(series, NULL, 5, growth, &error), HENCE_ERR_NO_MEANING, 1, 2);
    series[2] = NAN;
    REFUSED(hence_growth_estimate(series, NULL, 5, growth, &error), HENCE_ERR_NOT_FINITE, 1, 2);
    series[2] = 1.75;
    growth->struct_size = sizeof *growth - 8;
    REFUSED(hence_growth_estimate(series, NULL, 5, growth, &error), HENCE_ERR_RANGE, 4, -1);
    for (size_t k = 4; k < sizeof room.bytes; k++) CHECK(room.bytes[k] == 0xaa);
    /* A larger struct, of a later version, keeps its end and its size. */
    growth->struct_size = sizeof room.bytes;
    CHECK(hence_growth_estimate(series, dated, 4, growth, &error) == HENCE_OK && growth->has_persistence == 1);
    CHECK(growth->struct_size == sizeof room.bytes && fabs(growth->mean - log(2.5) / 3.0) < 1e-15);
    for (size_t k = sizeof *growth; k < sizeof room.bytes; k++) CHECK(room.bytes[k] == 0xaa);
    double doubling[4] = {1.0, 2.0, 4.0, 8.0};
    CHECK(hence_growth_estimate(doubling, NULL, 4, growth, &error) == HENCE_OK && growth->has_persistence == 0);
    CHECK(growth->persistence == 0.0 && growth->persistence_error == 0.0 && growth->trend_growth == 1.0);
  }

  /* Switching values: growth of 2.5% and an elasticity of 1.25 make the 4% at which 104 in a year are worth 100. */
  {
    hence_basis *ramsey = NULL;
    double later[2] = {-100.0, 104.0};
    double still[2] = {0.0, 0.0};
    double touching[3] = {100.0, -220.0, 121.0};
    CHECK(hence_basis_parse("preference 1.5%, elasticity 1, growth 2%", &ramsey, &error) == HENCE_OK);
#define SWITCH(b, p, t, x, n, low, high, values, capacity, count)                                                      \
  hence_switching_values(b, p, t, x, n, low, high, values, capacity, count, &error)
    REFUSED(SWITCH(NULL, 0, t, later, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_NULL, 1, -1);
    REFUSED(SWITCH(askew, 0, t, later, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_ALIGNMENT, 1, -1);
    REFUSED(SWITCH(ramsey, 4, t, later, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_RANGE, 2, -1);
    REFUSED(SWITCH(ramsey, -1, t, later, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_RANGE, 2, -1);
    REFUSED(SWITCH(basis, HENCE_PARAMETER_GROWTH, t, later, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_UNSUPPORTED, 2, -1);
    REFUSED(SWITCH(ramsey, 0, NULL, later, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_NULL, 3, -1);
    REFUSED(SWITCH(ramsey, 0, odd, later, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_ALIGNMENT, 3, -1);
    REFUSED(SWITCH(ramsey, 0, bad, touching, 3, -0.5, 1.0, out, 3, &count), HENCE_ERR_NOT_FINITE, 3, 2);
    REFUSED(SWITCH(ramsey, 0, t, NULL, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_NULL, 4, -1);
    REFUSED(SWITCH(ramsey, 0, t, still, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_NO_MEANING, 4, -1);
    REFUSED(SWITCH(ramsey, 3, t, still, 2, -0.5, 1.0, out, 3, &count), HENCE_ERR_NO_MEANING, 4, -1);
    REFUSED(SWITCH(ramsey, 0, t, touching, 3, -0.5, 1.0, out, 3, &count), HENCE_ERR_NO_MEANING, 4, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 0, -0.5, 1.0, out, 3, &count), HENCE_ERR_SHAPE, 5, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, huge, -0.5, 1.0, out, 3, &count), HENCE_ERR_LENGTH, 5, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, 1.0, -0.5, out, 3, &count), HENCE_ERR_RANGE, 6, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, NAN, 1.0, out, 3, &count), HENCE_ERR_NOT_FINITE, 6, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, INFINITY, out, 3, &count), HENCE_ERR_NOT_FINITE, 7, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, NULL, 3, &count), HENCE_ERR_NULL, 8, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, odd, 3, &count), HENCE_ERR_ALIGNMENT, 8, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, later, 2, &count), HENCE_ERR_OVERLAP, 8, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, t + 1, 2, &count), HENCE_ERR_OVERLAP, 8, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, NULL, 0, &count), HENCE_ERR_CAPACITY, 9, 1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, out, huge, &count), HENCE_ERR_LENGTH, 9, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, out, 3, NULL), HENCE_ERR_NULL, 10, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, out, 3, (void *)odd), HENCE_ERR_ALIGNMENT, 10, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, out, 3, (void *)(out + 1)), HENCE_ERR_OVERLAP, 10, -1);
    REFUSED(SWITCH(ramsey, 0, t, later, 2, -0.5, 1.0, out, 3, (void *)later), HENCE_ERR_OVERLAP, 10, -1);
    CHECK(later[0] == -100.0 && later[1] == 104.0);
    UNTOUCHED;
    CHECK(SWITCH(ramsey, 3, t, later, 2, -0.5, 1.0, out, 3, &count) == HENCE_OK && count == 1);
    CHECK(fabs(out[0] - 0.025) < 1e-14 && out[1] == -7.0);
    CHECK(SWITCH(ramsey, 2, t, later, 2, 2.0, 3.0, NULL, 0, &count) == HENCE_OK && count == 0);
    out[0] = -7.0;
    hence_basis_free(ramsey);
  }

  /* Draws. */
  {
    double x[6] = {-99.0, 102.0, 0.0, 0.0, 0.0, 1.0};
    double drawn[8] = {-7.0, -7.0, -7.0, -7.0, -7.0, -7.0, -7.0, -7.0};
    double drawn_rates[4] = {-7.0, -7.0, -7.0, -7.0};
    const char *wide = "normal mean 0% sd 50%";
#define DRAW(p, h, e, g, t, x, rows, n, count, threads, rates, values)                                                 \
  hence_draws_value(p, h, e, g, t, x, rows, n, count, 1, threads, rates, values, &error)
    REFUSED(DRAW(NULL, NULL, "1", "2%", t, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_NULL, 1, -1);
    REFUSED(DRAW("1%", NULL, NULL, "2%", t, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_NULL, 3, -1);
    REFUSED(DRAW("1%", NULL, "1", NULL, t, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_NULL, 4, -1);
    REFUSED(DRAW("1%", "\xff", "1", "2%", t, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_UTF8, 2, 0);
    REFUSED(DRAW("normal mean 1%", NULL, "1", "2%", t, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_SYNTAX, 1, 14);
    REFUSED(DRAW("1%", NULL, "21", "2%", t, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_RANGE, 3, -1);
    REFUSED(DRAW("1%", NULL, "1", "0.5 at 1%, 0.6 at 2%", t, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_RANGE, 4, -1);
    REFUSED(DRAW("1%", NULL, "1", wide, t, x, 2, 3, 1000, 1, NULL, NULL), HENCE_ERR_NULL, 13, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", NULL, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_NULL, 5, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", odd, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_ALIGNMENT, 5, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", bad, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_NOT_FINITE, 5, 2);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, NULL, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_NULL, 6, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, bad, 1, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_NOT_FINITE, 6, 2);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 0, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_SHAPE, 7, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, huge, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_LENGTH, 7, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, huge, 4, 1, drawn_rates, drawn), HENCE_ERR_LENGTH, 8, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, 0, 1, drawn_rates, drawn), HENCE_ERR_SHAPE, 9, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, huge, 1, drawn_rates, drawn), HENCE_ERR_LENGTH, 9, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, SIZE_MAX, 1, drawn_rates, drawn), HENCE_ERR_LENGTH, 9, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, 4, 0, drawn_rates, drawn), HENCE_ERR_RANGE, 11, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, 4, 1, odd, drawn), HENCE_ERR_ALIGNMENT, 12, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, 4, 1, x + 5, drawn), HENCE_ERR_OVERLAP, 12, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, 4, 1, drawn_rates, odd), HENCE_ERR_ALIGNMENT, 13, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, 4, 1, drawn_rates, x), HENCE_ERR_OVERLAP, 13, -1);
    REFUSED(DRAW("1%", NULL, "1", "2%", t, x, 2, 3, 4, 1, drawn + 4, drawn), HENCE_ERR_OVERLAP, 13, -1);
    {
      double far[3] = {0.0, 1.0, 10001.0};
      REFUSED(DRAW("1%", NULL, "1", "2%", far, x, 2, 3, 4, 1, drawn_rates, drawn), HENCE_ERR_DOMAIN, 5, 2);
    }
    {
      /* Half of the draws are outside; and rates of -40% and less are, though their parts are not. */
      double *many = malloc(2000 * sizeof *many);
      many[0] = many[1999] = -7.0;
      CHECK(DRAW("1%", NULL, "1", "normal mean -100% sd 10%", t, x, 2, 3, 1000, 1, NULL, many) == HENCE_ERR_RANGE);
      CHECK(error.argument == 4);
      REFUSED(DRAW("-40%", NULL, "1", "-20%", t, x, 2, 3, 1000, 1, NULL, many), HENCE_ERR_RANGE, 0, 0);
      double large[3] = {1.7e308, 1.7e308, 1.7e308};
      REFUSED(DRAW("1%", NULL, "1", "2%", t, large, 1, 3, 1000, 1, NULL, many), HENCE_ERR_NOT_FINITE, 0, 0);
      CHECK(many[0] == -7.0 && many[1999] == -7.0);
      free(many);
    }
    for (int i = 0; i < 8; i++) CHECK(drawn[i] == -7.0 && drawn_rates[i / 2] == -7.0);
    CHECK(DRAW("1%", NULL, "1", "1%", t, x, 2, 3, 4, 3, drawn_rates, drawn) == HENCE_OK);
    for (int i = 0; i < 4; i++) {
      CHECK(drawn_rates[i] == 0.02 && fabs(drawn[i] - 1.0) < 1e-13 && fabs(drawn[4 + i] - 1.0 / 1.0404) < 1e-15);
    }
    CHECK(DRAW("1%", NULL, "1", "1%", NULL, NULL, 2, 0, 4, 1, NULL, drawn) == HENCE_OK && drawn[0] == 0.0 && drawn[7] == 0.0);

    double values[8] = {1.0, 2.0, 3.0, 5.0, 2.0, 2.0, 1.0, 4.0};
    double percentiles[2] = {50.0, 101.0};
    union {
      hence_spread spread;
      unsigned char bytes[sizeof(hence_spread) + 8];
    } room;
    hence_spread *spread = &room.spread;
    memset(&room, 0xaa, sizeof room);
    spread->struct_size = sizeof *spread;
    REFUSED(hence_draws_spread(NULL, 4, percentiles, 1, out, spread, &error), HENCE_ERR_NULL, 1, -1);
    REFUSED(hence_draws_spread(odd, 4, percentiles, 1, out, spread, &error), HENCE_ERR_ALIGNMENT, 1, -1);
    REFUSED(hence_draws_spread(values, 0, percentiles, 1, out, spread, &error), HENCE_ERR_SHAPE, 1, -1);
    REFUSED(hence_draws_spread(bad, 3, percentiles, 1, out, spread, &error), HENCE_ERR_NOT_FINITE, 1, 2);
    REFUSED(hence_draws_spread(values, huge, percentiles, 1, out, spread, &error), HENCE_ERR_LENGTH, 2, -1);
    REFUSED(hence_draws_spread(values, 4, NULL, 1, out, spread, &error), HENCE_ERR_NULL, 3, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 2, out, spread, &error), HENCE_ERR_RANGE, 3, 1);
    REFUSED(hence_draws_spread(values, 4, bad, 3, out, spread, &error), HENCE_ERR_NOT_FINITE, 3, 2);
    REFUSED(hence_draws_spread(values, 4, percentiles, huge, out, spread, &error), HENCE_ERR_LENGTH, 4, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, NULL, spread, &error), HENCE_ERR_NULL, 5, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, values + 3, spread, &error), HENCE_ERR_OVERLAP, 5, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, percentiles, spread, &error), HENCE_ERR_OVERLAP, 5, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, out, NULL, &error), HENCE_ERR_NULL, 6, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, out, (void *)odd, &error), HENCE_ERR_ALIGNMENT, 6, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, out, (void *)values, &error), HENCE_ERR_OVERLAP, 6, -1);
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, &spread->sd, spread, &error), HENCE_ERR_OVERLAP, 6, -1);
    spread->struct_size = 4;
    REFUSED(hence_draws_spread(values, 4, percentiles, 1, out, spread, &error), HENCE_ERR_RANGE, 6, -1);
    for (size_t k = 4; k < sizeof room.bytes; k++) CHECK(room.bytes[k] == 0xaa);
    UNTOUCHED;
    spread->struct_size = sizeof room.bytes;
    CHECK(hence_draws_spread(values, 4, percentiles, 1, out, spread, &error) == HENCE_OK && out[0] == 2.5);
    CHECK(spread->mean == 2.75 && spread->highest == 5.0 && spread->positive == 1.0 && out[1] == -7.0);
    for (size_t k = sizeof *spread; k < sizeof room.bytes; k++) CHECK(room.bytes[k] == 0xaa);
    out[0] = -7.0;

    double alone[2] = {-7.0, -7.0}, tied[2] = {-7.0, -7.0};
    REFUSED(hence_draws_rank(NULL, 2, 4, alone, tied, &error), HENCE_ERR_NULL, 1, -1);
    REFUSED(hence_draws_rank(odd, 2, 4, alone, tied, &error), HENCE_ERR_ALIGNMENT, 1, -1);
    REFUSED(hence_draws_rank(values, 0, 4, alone, tied, &error), HENCE_ERR_SHAPE, 1, -1);
    REFUSED(hence_draws_rank(values, 2, 0, alone, tied, &error), HENCE_ERR_SHAPE, 1, -1);
    REFUSED(hence_draws_rank(bad, 1, 3, alone, tied, &error), HENCE_ERR_NOT_FINITE, 1, 2);
    REFUSED(hence_draws_rank(values, huge, 4, alone, tied, &error), HENCE_ERR_LENGTH, 2, -1);
    REFUSED(hence_draws_rank(values, 2, huge, alone, tied, &error), HENCE_ERR_LENGTH, 3, -1);
    REFUSED(hence_draws_rank(values, 2, 4, NULL, tied, &error), HENCE_ERR_NULL, 4, -1);
    REFUSED(hence_draws_rank(values, 2, 4, values, tied, &error), HENCE_ERR_OVERLAP, 4, -1);
    REFUSED(hence_draws_rank(values, 2, 4, alone, NULL, &error), HENCE_ERR_NULL, 5, -1);
    REFUSED(hence_draws_rank(values, 2, 4, alone, odd, &error), HENCE_ERR_ALIGNMENT, 5, -1);
    REFUSED(hence_draws_rank(values, 2, 4, alone, values + 7, &error), HENCE_ERR_OVERLAP, 5, -1);
    REFUSED(hence_draws_rank(values, 2, 4, alone, alone, &error), HENCE_ERR_OVERLAP, 5, -1);
    CHECK(alone[0] == -7.0 && alone[1] == -7.0 && tied[0] == -7.0 && tied[1] == -7.0);
    CHECK(hence_draws_rank(values, 2, 4, alone, tied, &error) == HENCE_OK && alone[0] == 0.5 && tied[1] == 0.25);
  }
  UNTOUCHED;

  /* Cells. */
  hence_answer *answer = NULL;
  double number = 1.0;
  uint8_t kind = HENCE_CELL_NUMBER;
  hence_range cell = {sizeof cell, 1, 1, &number, NULL, NULL};
  const hence_range *given[2] = {&cell, &cell};
  REFUSED(hence_worksheet_call(NULL, given, 2, &answer, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_worksheet_call("FACTORIAL", given, 2, &answer, &error), HENCE_ERR_SYNTAX, 1, -1);
  REFUSED(hence_worksheet_call("FACTOR", NULL, 2, &answer, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_worksheet_call("FACTOR", given, huge, &answer, &error), HENCE_ERR_LENGTH, 3, -1);
  REFUSED(hence_worksheet_call("FACTOR", given, 2, NULL, &error), HENCE_ERR_NULL, 4, -1);
  REFUSED(hence_worksheet_call("FACTOR", (void *)odd, 2, &answer, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_worksheet_call("FACTOR", given, 2, (void *)odd, &error), HENCE_ERR_ALIGNMENT, 4, -1);
  REFUSED(hence_worksheet_call("\xff", given, 2, &answer, &error), HENCE_ERR_UTF8, 1, 0);
  given[1] = (void *)odd;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_ALIGNMENT, 2, 1);
  given[1] = &cell;
  cell.struct_size = 8;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_RANGE, 2, 0);
  cell.struct_size = sizeof cell;
  cell.rows = 0;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_SHAPE, 2, 0);
  cell.rows = SIZE_MAX / 2;
  cell.columns = 4;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_LENGTH, 2, 0);
  cell.rows = cell.columns = 1;
  cell.numbers = NULL;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_NULL, 2, 0);
  cell.numbers = odd;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_ALIGNMENT, 2, 0);
  cell.numbers = &number;
  cell.kinds = &kind;
  kind = 9;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_RANGE, 2, 0);
  kind = HENCE_CELL_TEXT;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_NULL, 2, 0);
  const char *words[1] = {"\xff"};
  cell.texts = words;
  REFUSED(hence_worksheet_call("FACTOR", given, 2, &answer, &error), HENCE_ERR_UTF8, 2, 0);
  CHECK(answer == NULL);
  /* Arguments left out, and too many, are answered by an error value in the cell. */
  double found = 0.0;
  given[0] = NULL;
  CHECK(hence_worksheet_call("FACTOR", given, 2, &answer, &error) == HENCE_ERR_UTF8);
  words[0] = "not a number";
  CHECK(hence_worksheet_call("HENCE.factor", given, 2, &answer, &error) == HENCE_OK);
  CHECK(hence_answer_cells(answer, &found, &kind, 1, &error) == HENCE_OK);
  CHECK(kind == HENCE_CELL_ERROR && found == 3.0);
  size_t rows = 0, columns = 0;
  CHECK(hence_answer_shape(answer, &rows, &columns, &error) == HENCE_OK && rows == 1 && columns == 1);
  REFUSED(hence_answer_shape(NULL, &rows, &columns, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_answer_shape(answer, NULL, &columns, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_answer_shape(answer, &rows, NULL, &error), HENCE_ERR_NULL, 3, -1);
  hence_answer *tilted = (hence_answer *)(void *)((char *)answer + 1);
  REFUSED(hence_answer_shape(tilted, &rows, &columns, &error), HENCE_ERR_ALIGNMENT, 1, -1);
  REFUSED(hence_answer_shape(answer, &rows, &rows, &error), HENCE_ERR_OVERLAP, 3, -1);
  REFUSED(hence_answer_cells(NULL, &found, &kind, 1, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_answer_cells(answer, &found, (uint8_t *)&found, 1, &error), HENCE_ERR_OVERLAP, 3, -1);
  REFUSED(hence_answer_cells(answer, odd, &kind, 1, &error), HENCE_ERR_ALIGNMENT, 2, -1);
  REFUSED(hence_answer_text(NULL, 0, text, sizeof text, &error), HENCE_ERR_NULL, 1, -1);
  REFUSED(hence_answer_text(answer, 0, NULL, sizeof text, &error), HENCE_ERR_NULL, 3, -1);
  CHECK(rows == 1 && columns == 1 && found == 3.0 && kind == HENCE_CELL_ERROR);
  REFUSED(hence_answer_cells(answer, &found, &kind, 2, &error), HENCE_ERR_CAPACITY, 4, 1);
  REFUSED(hence_answer_cells(answer, NULL, &kind, 1, &error), HENCE_ERR_NULL, 2, -1);
  REFUSED(hence_answer_cells(answer, &found, NULL, 1, &error), HENCE_ERR_NULL, 3, -1);
  REFUSED(hence_answer_text(answer, 1, text, sizeof text, &error), HENCE_ERR_LENGTH, 2, -1);
  REFUSED(hence_answer_text(answer, 0, text, 0, &error), HENCE_ERR_CAPACITY, 4, 1);
  CHECK(hence_answer_text(answer, 0, text, 1, &error) == HENCE_OK && text[0] == '\0');
  hence_answer_free(answer);
  hence_answer_free(NULL);

  /* Error structs of other sizes: only the bytes that the caller has are written, and a cut message ends in NUL. */
  const uint32_t sizes[] = {0, 3, 4, 8, 24, 25, 100, 280, 1000};
  for (size_t i = 0; i < sizeof sizes / sizeof *sizes; i++) {
    union {
      hence_error error;
      unsigned char bytes[1000];
    } room;
    memset(&room, 0xaa, sizeof room);
    room.error.struct_size = sizes[i];
    CHECK(hence_basis_parse("uk-1066", &none, &room.error) == HENCE_ERR_SCHEDULE);
    size_t written = sizes[i] < sizeof(hence_error) ? sizes[i] : sizeof(hence_error);
    CHECK(room.error.struct_size == sizes[i]);
    for (size_t k = written < 4 ? 4 : written; k < sizeof room.bytes; k++) {
      CHECK(room.bytes[k] == 0xaa);
    }
    if (sizes[i] >= 8) CHECK(room.error.code == HENCE_ERR_SCHEDULE);
    if (sizes[i] > 24) CHECK(memchr(room.error.message, '\0', written - 24) != NULL);
  }
  /* An error struct that is not aligned is left alone. */
  unsigned char shifted[sizeof(hence_error) + 8];
  memset(shifted, 0xaa, sizeof shifted);
  CHECK(hence_basis_parse("uk-1066", &none, (hence_error *)(void *)(shifted + 1)) == HENCE_ERR_SCHEDULE);
  for (size_t k = 0; k < sizeof shifted; k++) CHECK(shifted[k] == 0xaa);

  /* Still in order after all that. */
  CHECK(hence_factors(basis, t, 3, out, &error) == HENCE_OK && out[0] == 1.0 && fabs(out[1] - 1 / 1.035) < 1e-15);
  hence_basis_free(basis);
  printf("%d checks\n", checks);
  return 0;
}
