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
  int32_t (*along[3])(const hence_basis *, const double *, size_t, double *, hence_error *) = {
      hence_factors, hence_forward_rates, hence_mean_rates};
  for (int i = 0; i < 3; i++) {
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
