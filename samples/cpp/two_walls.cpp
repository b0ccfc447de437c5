// Weighs two flood walls where the discount rate is uncertain, calling hence from C++. The town of Wrenmouth is invented.
//
// From the root of the repository:
//
//     cargo build --release -p hence-ffi
//     c++ -std=c++17 -Wall -Wextra -Werror -pedantic -Iinclude samples/cpp/two_walls.cpp -Ltarget/release -lhence -o target/two_walls_cpp
//     LD_LIBRARY_PATH=target/release target/two_walls_cpp
#include "hence.hpp"

#include <cinttypes>
#include <cstdio>
#include <cstring>
#include <exception>
#include <string>
#include <vector>

namespace {

const std::vector<std::string> names = {"the low wall", "the high wall"};
const std::vector<double> percentiles = {5, 50, 95};

// Consumption a head in thousand crowns, the last ten years.
const std::vector<double> series = {21.0, 21.4, 21.3, 21.9, 22.4, 22.6, 22.5, 23.1, 23.6, 23.9};

// The bits stand beside each number, so that two runs can be compared to the last one.
void show(const std::string &what, double x) {
    std::uint64_t bits = 0;
    std::memcpy(&bits, &x, sizeof bits);
    std::printf("%-44s%14.6f  %016" PRIx64 "\n", what.c_str(), x, bits);
}

void weigh() {
    constexpr std::size_t years = 101, draws = 10000;
    // Million crowns a year: the high wall costs more, and avoids more as the sea rises. An option a row.
    std::vector<double> offsets(years), consumption(years), flows(2 * years), more(years);
    for (std::size_t t = 0; t < years; t++) {
        const auto year = static_cast<double>(t);
        offsets[t] = year;
        consumption[t] = 600.0 + 9.0 * year;
        flows[t] = t == 0 ? -28.0 : 1.25;
        flows[years + t] = t == 0 ? -70.0 : 1.25 + 0.0625 * year;
        more[t] = flows[years + t] - flows[t];
    }

    // Where the parts of the rate come from.
    const hence_growth growth = hence::growth(series);
    show("growth along the trend", growth.trend_growth);
    show("standard error of log growth", growth.trend_error);
    show("standard deviation from year to year", growth.sd);
    show("hazard of a flood that ends the town", hence::hazard_from_waiting_time(500));

    // The parts as distributions. The same seed gives the same draws everywhere.
    const auto drawn = hence::draws_value(
        {"uniform 0% to 1%", "every 500 years", "triangular 1, 1.5, 2", "normal mean 1.5% sd 0.4%"}, offsets, flows,
        draws, 7, 2);
    const auto first = hence::draws_rank(drawn.values, names.size()).first;
    for (std::size_t i = 0; i < names.size(); i++) {
        const std::string of = " of " + names[i];
        const auto found = hence::draws_spread({drawn.values.data() + i * draws, draws}, percentiles);
        show("mean" + of, found.of.mean);
        for (std::size_t k = 0; k < percentiles.size(); k++)
            show("percentile " + std::to_string(static_cast<int>(percentiles[k])) + of, found.percentiles[k]);
        show("chance to be worth it" + of, found.of.positive);
        show("chance to be first" + of, first[i]);
    }

    // Where the two swap: what the high wall gives more is worth nothing.
    const hence::basis basis("preference 0.5%, hazard 0.2%, elasticity 1.5, growth 1.5%");
    using hence::parameter;
    for (auto [of, words] : {std::pair{parameter::rate, "rate"}, std::pair{parameter::preference, "preference"},
                             std::pair{parameter::elasticity, "elasticity"}, std::pair{parameter::growth, "growth"}}) {
        const bool is_elasticity = of == parameter::elasticity;
        const double lowest = is_elasticity ? 0.0 : -0.5, highest = is_elasticity ? 20.0 : 1.0;
        for (double at : basis.switching_values(of, offsets, more, lowest, highest))
            show(std::string("the walls swap at this ") + words, at);
    }

    // The wall is not small against what the town consumes.
    const auto factors = hence::welfare_factors(consumption, offsets, consumption[0], 0.007, 1.5);
    const hence::numbers high(flows.data() + years, years);
    show("exact value of " + names[1],
         hence::equivalent_variation(high, consumption, factors, consumption[0], 1.5));

    // A text that is no distribution is refused, with the place of the slip.
    try {
        hence::draws_value({"uniform 0% to 1%", "0%", "1.5", "normal mean 1,5% sd 0.4%"}, offsets, flows, draws, 7);
    } catch (const hence::error &e) {
        std::printf("refused: %s (argument %" PRId32 ", index %" PRId64 ")\n", hence_status_name(e.code), e.argument,
                    e.index);
    }
}

}  // namespace

int main() {
    try {
        hence::check_version();
        weigh();
    } catch (const std::exception &e) {
        std::fprintf(stderr, "%s\n", e.what());
        return 1;
    }
}
