/* What the C++ layer of the samples offers beyond their program: it owns its handle alone, and each result is printed by
 * its bits for comparison with the library. */
#include "hence.hpp"

#include <cinttypes>
#include <cstdio>
#include <cstring>
#include <type_traits>
#include <utility>

static_assert(!std::is_copy_constructible_v<hence::basis> && !std::is_copy_assignable_v<hence::basis>);
static_assert(std::is_nothrow_move_constructible_v<hence::basis> && std::is_nothrow_move_assignable_v<hence::basis>);

static void show(double x) {
    std::uint64_t bits = 0;
    std::memcpy(&bits, &x, sizeof bits);
    std::printf("%016" PRIx64 "\n", bits);
}

int main() {
    hence::check_version();
    hence::basis first("2.5% to 2070, 1.5% after", 2026);
    const hence::basis moved = std::move(first);
    const double offsets[] = {10, 50, 90};
    for (double x : moved.factors(hence::numbers(offsets, 3))) show(x);
    for (double x : moved.mean_rates(hence::numbers(offsets + 1, 2))) show(x);
    const hence::basis by_length("3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated", 0, 20);
    show(by_length.factors(hence::numbers(offsets, 1)).front());
    for (double x : hence::offsets_from_dates({20260401, 20280701}, 20260401)) show(x);
    show(hence::offsets_from_dates({20280701}, 20260401, "30E/360").front());
    show(hence::ramsey_rate_uncertain(0.01, 2, 0.02, 0.036));
    show(hence::elasticity_from_taxes(0.42, 0.29));
    show(hence::real_rate(0.0555, 0.0203));
    for (double x : moved.instantaneous_rates(hence::numbers(offsets, 3))) show(x);
    const std::vector<double> four = {2, 2.5, 2.25, 3}, shares = {0.4, 0.3, 0.2, 0.1}, times = {0, 1, 2, 3};
    show(hence::elasticity_from_brackets(shares, shares, four));
    show(hence::hazard_from_probability(0.01, hence::compounding::continuous));
    const hence_growth growth = hence::growth(four, {2020, 2021, 2022, 2023});
    for (double x : {growth.mean_growth, growth.persistence, growth.persistence_error}) show(x);
    show(hence::utility(2.5, 1.5));
    show(hence::marginal_utility(2.5, 1.5));
    show(hence::welfare(four, times, 0.01, 1.5));
    show(hence::compensation(0.5, 2, 3, 10, 0.01, 1.5));
    show(hence::compensating_variation(shares, four, shares, 2, 0.4, 1.5));
    show(hence::equally_distributed_equivalent(four, shares, 1.5));
    show(hence::switching_multiplier(20, -100));
    try {
        hence::growth(four, {2020, 2021, 2023, 2024});
    } catch (const hence::error &e) {
        std::printf("%s, argument %" PRId32 ", index %" PRId64 "\n", hence_status_name(e.code), e.argument, e.index);
    }
    /* More values than a first guess has room for: the nine changes of sign lie at 5% to 45%. */
    const hence::basis flat("3.5%");
    std::vector<double> flows = {1}, years(10);
    for (int k = 1; k < 10; k++) {
        years[static_cast<std::size_t>(k)] = k;
        flows.push_back(0);
        for (std::size_t i = flows.size() - 1; i > 0; i--) flows[i] -= flows[i - 1] * (1 + 0.05 * k);
    }
    std::printf("%zu\n", flat.switching_values(hence::parameter::rate, years, flows, 0, 1).size());
    std::printf("%s\n", hence::schedule_line("uk-2003").c_str());
    try {
        first.factors(hence::numbers(offsets, 3)); /* moved from: NULL, which the library refuses */
    } catch (const hence::error &e) {
        std::printf("%s, argument %" PRId32 "\n", hence_status_name(e.code), e.argument);
    }
}
