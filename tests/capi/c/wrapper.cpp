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
    std::printf("%s\n", hence::schedule_line("uk-2003").c_str());
    try {
        first.factors(hence::numbers(offsets, 3)); /* moved from: NULL, which the library refuses */
    } catch (const hence::error &e) {
        std::printf("%s, argument %" PRId32 "\n", hence_status_name(e.code), e.argument);
    }
}
