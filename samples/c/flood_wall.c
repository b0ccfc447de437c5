/* Values a flood wall over a hundred years, calling hence from C. The town of Wrenmouth is invented.
 *
 * From the root of the repository:
 *
 *     cargo build --release -p hence-ffi
 *     cc -std=c99 -Wall -Wextra -Werror -pedantic -Iinclude samples/c/flood_wall.c -Ltarget/release -lhence -o target/flood_wall_c
 *     LD_LIBRARY_PATH=target/release target/flood_wall_c
 *
 * Another rate line or schedule and another timing may follow: "3.5% to 30, 3% after" "flows end". */
#include <hence.h>

#include <inttypes.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

enum { YEARS = 101, STREAMS = 3, LINE = 1024 };

static const char *const names[STREAMS] = {"building", "upkeep", "avoided damage"};

/* Row-major, a stream a row: the shape that hence_present_values takes. */
static double years[YEARS], flows[STREAMS * YEARS];

/* The bits stand beside each number, so that two runs can be compared to the last one. */
static void show(const char *what, double x) {
    uint64_t bits;
    memcpy(&bits, &x, sizeof bits);
    printf("%-34s%14.6f  %016" PRIx64 "\n", what, x, bits);
}

static void show_in(const char *what, double year, double x) {
    char label[40];
    snprintf(label, sizeof label, "%s in %.0f", what, year);
    show(label, x);
}

/* The file has a column a stream, so each number goes to its place in its row. */
static int read_flows(const char *path) {
    FILE *file = fopen(path, "r");
    int n = 0;
    if (file == NULL) return 0;
    if (fscanf(file, "%*[^\n]") == 0)
        while (n < YEARS && fscanf(file, "%lf,%lf,%lf,%lf", &years[n], &flows[n], &flows[YEARS + n],
                                   &flows[2 * YEARS + n]) == 4)
            n++;
    fclose(file);
    return n == YEARS;
}

/* Every call returns a status and fills the error; the first that fails ends the work. */
static int value_the_wall(const hence_basis *basis, const char *timing, hence_error *error) {
    double offsets[YEARS], factors[YEARS], rates[YEARS], net[YEARS], values[STREAMS];
    double npv, annual, rate, weight, found[8];
    size_t count;
    char text[LINE];

    if (hence_basis_line(basis, text, sizeof text, error) != HENCE_OK) return 0;
    printf("basis: %s\n", text);
    if (hence_basis_describe(basis, text, sizeof text, error) != HENCE_OK) return 0;
    printf("in words: %s\n", text);

    /* The first year of the file is the base: its flows stand half a year before the year's end. */
    if (hence_offsets_from_years(years, YEARS, years[0], timing, offsets, error) != HENCE_OK) return 0;
    if (hence_factors(basis, offsets, YEARS, factors, error) != HENCE_OK) return 0;
    if (hence_forward_rates(basis, offsets, YEARS, rates, error) != HENCE_OK) return 0;
    for (int i = 0; i < YEARS; i += 25) {
        show_in("offset", years[i], offsets[i]);
        show_in("factor", years[i], factors[i]);
        show_in("forward rate", years[i], rates[i]);
    }

    if (hence_present_values(basis, offsets, flows, STREAMS, YEARS, values, error) != HENCE_OK) return 0;
    for (int s = 0; s < STREAMS; s++) {
        snprintf(text, sizeof text, "present value of %s", names[s]);
        show(text, values[s]);
    }
    for (int i = 0; i < YEARS; i++) net[i] = flows[i] + flows[YEARS + i] + flows[2 * YEARS + i];
    if (hence_present_value(basis, offsets, net, YEARS, &npv, error) != HENCE_OK) return 0;
    show("net present value", npv);
    if (hence_annual_equivalent(basis, npv, YEARS - 1, &annual, error) != HENCE_OK) return 0;
    show("the same every year", annual);

    /* The wall is rebuilt in the last year: flows that change their sign twice can have two rates of return. */
    if (hence_irr_all(offsets, net, YEARS, -0.5, 1.0, found, 8, &count, error) != HENCE_OK) return 0;
    for (size_t k = 0; k < count; k++) show("internal rate of return", found[k]);

    if (hence_ramsey_rate(0.015, 1.0, 0.02, &rate, error) != HENCE_OK) return 0;
    show("Ramsey rate", rate);
    if (hence_equity_weight(21400.0, 34250.0, 1.3, &weight, error) != HENCE_OK) return 0;
    show("equity weight of the harbour side", weight);

    /* A gap in the data is refused, never valued as something; the index says where it is. */
    flows[YEARS + 24] = NAN;
    if (hence_present_values(basis, offsets, flows, STREAMS, YEARS, values, error) == HENCE_OK) return 0;
    printf("refused: %s: %s (argument %" PRId32 ", index %" PRId64 ")\n", hence_status_name(error->code),
           error->message, error->argument, error->index);
    printf("which is %s in %.0f\n", names[error->index / YEARS], years[error->index % YEARS]);
    return 1;
}

int main(int argc, char **argv) {
    const char *curve = argc > 1 ? argv[1] : "uk-2003";
    const char *timing = argc > 2 ? argv[2] : "flows middle";
    hence_error error = {.struct_size = sizeof error};
    hence_basis *basis = NULL;
    char line[LINE];

    if (hence_abi_version() != HENCE_ABI_VERSION) {
        fprintf(stderr, "the library is not the one of this header\n");
        return 1;
    }
    if (!read_flows("samples/flood-wall.csv")) {
        fprintf(stderr, "samples/flood-wall.csv could not be read\n");
        return 1;
    }
    /* The timing is part of the basis, so that the printed line says all that repeats the values. */
    snprintf(line, sizeof line, "%s; %s", curve, timing);
    int done = hence_basis_parse(line, &basis, &error) == HENCE_OK && value_the_wall(basis, timing, &error);
    if (!done)
        fprintf(stderr, "%s: %s (argument %" PRId32 ", index %" PRId64 ")\n", hence_status_name(error.code),
                error.message, error.argument, error.index);
    hence_basis_free(basis);
    return done ? 0 : 1;
}
