// Values a flood wall over a hundred years, calling hence from C++. The town of Wrenmouth is invented.
//
// From the root of the repository:
//
//     cargo build --release -p hence-ffi
//     c++ -std=c++17 -Wall -Wextra -Werror -pedantic -Iinclude samples/cpp/flood_wall.cpp -Ltarget/release -lhence -o target/flood_wall_cpp
//     LD_LIBRARY_PATH=target/release target/flood_wall_cpp
//
// Another rate line or schedule and another timing may follow: "3.5% to 30, 3% after" "flows end".
#include "hence.hpp"

#include <cinttypes>
#include <cstdio>
#include <cstring>
#include <exception>
#include <fstream>
#include <limits>
#include <string>
#include <vector>

namespace {

const std::vector<std::string> names = {"building", "upkeep", "avoided damage"};

struct plan {
    std::vector<double> years;
    std::vector<double> flows;  // row-major, a stream a row
};

// The bits stand beside each number, so that two runs can be compared to the last one.
void show(const std::string &what, double x) {
    std::uint64_t bits = 0;
    std::memcpy(&bits, &x, sizeof bits);
    std::printf("%-34s%14.6f  %016" PRIx64 "\n", what.c_str(), x, bits);
}

// The file has a column a stream: the columns are read apart, then joined as rows.
plan read_plan(const std::string &path) {
    std::ifstream file(path);
    std::string heading;
    if (!std::getline(file, heading)) throw std::runtime_error(path + " could not be read");
    plan read;
    std::vector<std::vector<double>> streams(names.size());
    double year = 0, flow = 0;
    char comma = 0;
    while (file >> year) {
        read.years.push_back(year);
        for (auto &stream : streams) {
            if (!(file >> comma >> flow)) throw std::runtime_error(path + ": a line is too short");
            stream.push_back(flow);
        }
    }
    for (const auto &stream : streams) read.flows.insert(read.flows.end(), stream.begin(), stream.end());
    return read;
}

void value_the_wall(const std::string &curve, const std::string &timing) {
    plan wall = read_plan("samples/flood-wall.csv");
    const std::size_t n = wall.years.size();

    // The timing is part of the basis, so that the printed line says all that repeats the values.
    const hence::basis basis(curve + "; " + timing);
    std::printf("basis: %s\n", basis.line().c_str());
    std::printf("in words: %s\n", basis.words().c_str());

    // The first year of the file is the base: its flows stand half a year before the year's end.
    const auto offsets = hence::offsets_from_years(wall.years, wall.years.front(), timing);
    const auto factors = basis.factors(offsets);
    const auto rates = basis.forward_rates(offsets);
    for (std::size_t i = 0; i < n; i += 25) {
        const std::string in = " in " + std::to_string(static_cast<int>(wall.years[i]));
        show("offset" + in, offsets[i]);
        show("factor" + in, factors[i]);
        show("forward rate" + in, rates[i]);
    }

    const auto values = basis.present_values(offsets, wall.flows);
    for (std::size_t s = 0; s < names.size(); s++) show("present value of " + names[s], values[s]);
    std::vector<double> net(n);
    for (std::size_t i = 0; i < n; i++) net[i] = wall.flows[i] + wall.flows[n + i] + wall.flows[2 * n + i];
    const double npv = basis.present_value(offsets, net);
    show("net present value", npv);
    show("the same every year", basis.annual_equivalent(npv, static_cast<std::int32_t>(n) - 1));

    // The wall is rebuilt in the last year: flows that change their sign twice can have two rates of return.
    for (double rate : hence::irr_all(offsets, net)) show("internal rate of return", rate);

    show("Ramsey rate", hence::ramsey_rate(0.015, 1.0, 0.02));
    show("equity weight of the harbour side", hence::equity_weight(21400, 34250, 1.3));

    // A gap in the data is refused, never valued as something; the index says where it is.
    wall.flows[n + 24] = std::numeric_limits<double>::quiet_NaN();
    try {
        basis.present_values(offsets, wall.flows);
    } catch (const hence::error &e) {
        const auto at = static_cast<std::size_t>(e.index);
        std::printf("refused: %s (argument %" PRId32 ", index %" PRId64 ")\n", e.what(), e.argument, e.index);
        std::printf("which is %s in %.0f\n", names[at / n].c_str(), wall.years[at % n]);
    }
}

}  // namespace

int main(int argc, char **argv) {
    try {
        hence::check_version();
        value_the_wall(argc > 1 ? argv[1] : "uk-2003", argc > 2 ? argv[2] : "flows middle");
    } catch (const hence::error &e) {
        std::fprintf(stderr, "%s (argument %" PRId32 ", index %" PRId64 ")\n", e.what(), e.argument, e.index);
        return 1;
    } catch (const std::exception &e) {
        std::fprintf(stderr, "%s\n", e.what());
        return 1;
    }
}
