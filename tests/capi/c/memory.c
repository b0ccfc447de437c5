/* Memory runs out: each function that needs memory for its results says so, and the process goes on. */
#include "hence.h"

#include <stdio.h>
#include <stdlib.h>
#include <sys/resource.h>
#include <unistd.h>

#define CHECK(condition)                                                                                               \
  do {                                                                                                                 \
    if (!(condition)) {                                                                                                \
      fprintf(stderr, "line %d: %s\n", __LINE__, #condition);                                                          \
      exit(1);                                                                                                         \
    }                                                                                                                  \
  } while (0)

/* 64 MB an array. */
#define N ((size_t)8 << 20)

static hence_error error = {sizeof error, 0, 0, 0, ""};
static double *offsets, *flows, *out;
static int32_t *dates;

static void refused(int32_t status, int32_t argument) {
  CHECK(status == HENCE_ERR_LENGTH);
  CHECK(error.argument == argument);
  CHECK(out[0] == -7.0 && out[N - 1] == -7.0);
}

int main(void) {
  hence_basis *basis = NULL;
  double one = -7.0;
  size_t count = 77;
  offsets = calloc(N, sizeof *offsets);
  flows = calloc(N, sizeof *flows);
  dates = calloc(N, sizeof *dates);
  out = calloc(N, sizeof *out);
  CHECK(offsets != NULL && flows != NULL && dates != NULL && out != NULL);
  for (size_t i = 0; i < N; i++) {
    offsets[i] = (double)(i % 100);
    flows[i] = i % 2 == 0 ? -1.0 : 2.0;
    dates[i] = 20260401;
    out[i] = -7.0;
  }
  CHECK(hence_basis_parse("3.5%", &basis, &error) == HENCE_OK);

  /* Room for 16 MB more than there is now. */
  FILE *used = fopen("/proc/self/statm", "r");
  long pages = 0;
  CHECK(used != NULL && fscanf(used, "%ld", &pages) == 1);
  fclose(used);
  struct rlimit limit = {0, 0};
  limit.rlim_cur = limit.rlim_max = (rlim_t)pages * (rlim_t)sysconf(_SC_PAGESIZE) + ((rlim_t)16 << 20);
  CHECK(setrlimit(RLIMIT_AS, &limit) == 0);

  refused(hence_factors(basis, offsets, N, out, &error), 3);
  refused(hence_forward_rates(basis, offsets, N, out, &error), 3);
  refused(hence_mean_rates(basis, offsets, N, out, &error), 3);
  refused(hence_present_value(basis, offsets, flows, N, &one, &error), 4);
  refused(hence_present_values(basis, offsets, flows, 1, N, &one, &error), 5);
  refused(hence_irr_all(offsets, flows, N, -0.5, 1.0, out, N, &count, &error), 3);
  refused(hence_offsets_from_years(offsets, N, 0.0, NULL, out, &error), 2);
  refused(hence_offsets_from_dates(dates, N, 20260401, NULL, out, &error), 2);
  refused(hence_instantaneous_rates(basis, offsets, N, out, &error), 3);
  hence_growth growth = {.struct_size = sizeof growth};
  hence_spread spread = {.struct_size = sizeof spread};
  /* Consumption, shares and values: zeros would be refused, but only where there is memory to look. */
  refused(hence_welfare(flows, offsets, N, 0.01, 1.5, 0, &one, &error), 3);
  refused(hence_welfare_factors(flows, offsets, N, 1.0, 0.01, 1.5, 0, out, &error), 3);
  refused(hence_equivalent_variation(flows, flows, offsets, N, 1.0, 1.5, &one, &error), 4);
  refused(hence_compensating_variation(flows, flows, offsets, N, 1.0, 0.0, 1.5, &one, &error), 4);
  refused(hence_equally_distributed_equivalent(flows, offsets, N, 1.5, &one, &error), 3);
  refused(hence_elasticity_from_brackets(flows, flows, offsets, N, &one, &error), 4);
  refused(hence_growth_estimate(flows, NULL, N, &growth, &error), 3);
  refused(hence_switching_values(basis, 0, offsets, flows, N, -0.5, 1.0, out, N, &count, &error), 5);
  refused(hence_draws_value("1%", NULL, "1", "2%", offsets, flows, 1, N, 1, 1, 1, NULL, &one, &error), 7);
  refused(hence_draws_value("1%", NULL, "1", "2%", offsets, flows, 1, 2, N, 1, 1, NULL, out, &error), 9);
  refused(hence_draws_spread(flows, N, NULL, 0, NULL, &spread, &error), 2);
  refused(hence_draws_rank(flows, 1, N, &one, offsets, &error), 3);
  hence_range range = {sizeof range, N, 1, offsets, NULL, NULL};
  const hence_range *given[3] = {&range, &range, &range};
  hence_answer *answer = NULL;
  refused(hence_worksheet_call("REAL", given, 2, &answer, &error), 2);
  CHECK(one == -7.0 && count == 77 && answer == NULL);

  /* What fits is still computed. */
  CHECK(hence_factors(basis, offsets, 2, out, &error) == HENCE_OK && out[0] == 1.0 && out[1] < 1.0 && out[2] == -7.0);
  CHECK(hence_present_value(basis, offsets, flows, 2, &one, &error) == HENCE_OK && one == 2.0 * out[1] - 1.0);
  hence_basis_free(basis);
  printf("done\n");
  return 0;
}
