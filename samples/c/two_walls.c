/* Weighs two flood walls where the discount rate is uncertain, calling hence from C. The town of Wrenmouth is invented.
 *
 * From the root of the repository:
 *
 *     cargo build --release -p hence-ffi
 *     cc -std=c99 -Wall -Wextra -Werror -pedantic -Iinclude samples/c/two_walls.c -Ltarget/release -lhence -o target/two_walls_c
 *     LD_LIBRARY_PATH=target/release target/two_walls_c
 *
 * The same program stands in samples/cpp and samples/python, over layers that make it shorter. */
#include <hence.h>

#include <inttypes.h>
#include <stdio.h>
#include <string.h>

enum { YEARS = 101, OPTIONS = 2, DRAWS = 10000, SERIES = 10 };

static const char *const names[OPTIONS] = {"the low wall", "the high wall"};
static const double percentiles[] = {5, 50, 95};

/* Consumption a head in thousand crowns, the last ten years. */
static const double series[SERIES] = {21.0, 21.4, 21.3, 21.9, 22.4, 22.6, 22.5, 23.1, 23.6, 23.9};

static double offsets[YEARS], consumption[YEARS], flows[OPTIONS * YEARS], values[OPTIONS * DRAWS];

/* The bits stand beside each number, so that two runs can be compared to the last one. */
static void show(const char *what, double x) {
    uint64_t bits;
    memcpy(&bits, &x, sizeof bits);
    printf("%-44s%14.6f  %016" PRIx64 "\n", what, x, bits);
}

static void show_of(const char *what, const char *of, double x) {
    char label[80];
    snprintf(label, sizeof label, "%s of %s", what, of);
    show(label, x);
}

/* Million crowns a year: the high wall costs more, and avoids more as the sea rises. */
static void plan(void) {
    for (int t = 0; t < YEARS; t++) {
        offsets[t] = t;
        consumption[t] = 600.0 + 9.0 * t;
        flows[t] = t == 0 ? -28.0 : 1.25;
        flows[YEARS + t] = t == 0 ? -70.0 : 1.25 + 0.0625 * t;
    }
}

/* Every call returns a status and fills the error; the first that fails ends the work. */
static int weigh(const hence_basis *basis, hence_error *error) {
    hence_growth growth = {.struct_size = sizeof growth};
    hence_spread spread = {.struct_size = sizeof spread};
    double hazard, alone[OPTIONS], tied[OPTIONS], found[3], factors[YEARS], more[YEARS], at[8], exact;
    size_t count;

    /* Where the parts of the rate come from. */
    if (hence_growth_estimate(series, NULL, SERIES, &growth, error) != HENCE_OK) return 0;
    show("growth along the trend", growth.trend_growth);
    show("standard error of log growth", growth.trend_error);
    show("standard deviation from year to year", growth.sd);
    if (hence_hazard_from_waiting_time(500.0, HENCE_COMPOUNDING_YEARLY, &hazard, error) != HENCE_OK) return 0;
    show("hazard of a flood that ends the town", hazard);

    /* The parts as distributions. The same seed gives the same draws everywhere; rates are not asked for. */
    if (hence_draws_value("uniform 0% to 1%", "every 500 years", "triangular 1, 1.5, 2", "normal mean 1.5% sd 0.4%",
                          offsets, flows, OPTIONS, YEARS, DRAWS, 7, 2, NULL, values, error) != HENCE_OK)
        return 0;
    if (hence_draws_rank(values, OPTIONS, DRAWS, alone, tied, error) != HENCE_OK) return 0;
    for (int i = 0; i < OPTIONS; i++) {
        if (hence_draws_spread(values + i * DRAWS, DRAWS, percentiles, 3, found, &spread, error) != HENCE_OK) return 0;
        show_of("mean", names[i], spread.mean);
        for (int k = 0; k < 3; k++) {
            char label[32];
            snprintf(label, sizeof label, "percentile %.0f", percentiles[k]);
            show_of(label, names[i], found[k]);
        }
        show_of("chance to be worth it", names[i], spread.positive);
        show_of("chance to be first", names[i], alone[i]);
    }

    /* Where the two swap: what the high wall gives more is worth nothing. */
    for (int t = 0; t < YEARS; t++) more[t] = flows[YEARS + t] - flows[t];
    const char *const words[] = {"rate", "preference", "elasticity", "growth"};
    for (int32_t p = HENCE_PARAMETER_RATE; p <= HENCE_PARAMETER_GROWTH; p++) {
        double lowest = p == HENCE_PARAMETER_ELASTICITY ? 0.0 : -0.5, highest = p == HENCE_PARAMETER_ELASTICITY ? 20.0 : 1.0;
        if (hence_switching_values(basis, p, offsets, more, YEARS, lowest, highest, at, 8, &count, error) != HENCE_OK)
            return 0;
        for (size_t k = 0; k < count; k++) {
            char label[40];
            snprintf(label, sizeof label, "the walls swap at this %s", words[p]);
            show(label, at[k]);
        }
    }

    /* The wall is not small against what the town consumes. */
    if (hence_welfare_factors(consumption, offsets, YEARS, consumption[0], 0.007, 1.5, HENCE_COMPOUNDING_YEARLY,
                              factors, error) != HENCE_OK)
        return 0;
    if (hence_equivalent_variation(flows + YEARS, consumption, factors, YEARS, consumption[0], 1.5, &exact, error) !=
        HENCE_OK)
        return 0;
    show_of("exact value", names[1], exact);

    /* A text that is no distribution is refused, with the place of the slip. */
    if (hence_draws_value("uniform 0% to 1%", NULL, "1.5", "normal mean 1,5% sd 0.4%", offsets, flows, OPTIONS, YEARS,
                          DRAWS, 7, 1, NULL, values, error) == HENCE_OK)
        return 0;
    printf("refused: %s (argument %" PRId32 ", index %" PRId64 ")\n", hence_status_name(error->code), error->argument,
           error->index);
    return 1;
}

int main(void) {
    hence_error error = {.struct_size = sizeof error};
    hence_basis *basis = NULL;
    if (hence_abi_version() != HENCE_ABI_VERSION) {
        fprintf(stderr, "the library is not the one of this header\n");
        return 1;
    }
    plan();
    int done = hence_basis_parse("preference 0.5%, hazard 0.2%, elasticity 1.5, growth 1.5%", &basis, &error) ==
                   HENCE_OK &&
               weigh(basis, &error);
    if (!done)
        fprintf(stderr, "%s: %s (argument %" PRId32 ", index %" PRId64 ")\n", hence_status_name(error.code),
                error.message, error.argument, error.index);
    hence_basis_free(basis);
    return done ? 0 : 1;
}
