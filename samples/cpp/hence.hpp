// hence for C++17: a handle that frees itself, vectors in and out, and exceptions. Header only, to be copied.
#ifndef HENCE_HPP
#define HENCE_HPP

#include <hence.h>

#include <cstddef>
#include <cstdint>
#include <memory>
#include <stdexcept>
#include <string>
#include <utility>
#include <vector>

namespace hence {

// What the library refused, and where.
class error : public std::runtime_error {
public:
    explicit error(const hence_error &e)
        : std::runtime_error(std::string(hence_status_name(e.code)) + ": " + e.message), code(e.code),
          argument(e.argument), index(e.index) {}

    std::int32_t code;      // a status of hence.h
    std::int32_t argument;  // of the C function, from 1
    std::int64_t index;     // within that argument, or -1
};

// A view of doubles that stand one after the other, in a vector, an array or a part of either. Nothing is copied.
class numbers {
public:
    numbers(const double *data, std::size_t size) : data_(data), size_(size) {}
    template <class Container>
    numbers(const Container &from) : data_(from.data()), size_(from.size()) {}

    const double *data() const { return data_; }
    std::size_t size() const { return size_; }

private:
    const double *data_;
    std::size_t size_;
};

// Every function of the library ends in its error struct: this one adds it, and throws what it says.
template <class Function, class... Arguments>
void call(Function function, Arguments... arguments) {
    hence_error e{};
    e.struct_size = sizeof e;
    if (function(arguments..., &e) != HENCE_OK) throw error(e);
}

// Refuses a library that is not the one of the header, before anything else is called.
inline void check_version() {
    if (hence_abi_version() != HENCE_ABI_VERSION)
        throw std::runtime_error("the library is not the one of this header");
}

inline void same_size(numbers a, numbers b) {
    if (a.size() != b.size()) throw std::invalid_argument("the arrays differ in length");
}

// A text of the library. A buffer of no bytes is too small for any, and the error says how many are needed.
template <class Function, class Argument>
std::string text(Function function, Argument of) {
    hence_error e{};
    e.struct_size = sizeof e;
    char none = 0;
    function(of, &none, 0, &e);
    if (e.code != HENCE_ERR_CAPACITY) throw error(e);
    std::string out(static_cast<std::size_t>(e.index), '\0');
    call(function, of, out.data(), out.size());
    out.pop_back();  // the NUL
    return out;
}

// A function of numbers alone.
template <class Function, class... Numbers>
double number(Function function, Numbers... numbers) {
    double out = 0;
    call(function, numbers..., &out);
    return out;
}

enum class compounding : std::int32_t { yearly = HENCE_COMPOUNDING_YEARLY, continuous = HENCE_COMPOUNDING_CONTINUOUS };

inline std::int32_t code(compounding of) { return static_cast<std::int32_t>(of); }

// What may be moved to where a net present value is zero.
enum class parameter : std::int32_t {
    rate = HENCE_PARAMETER_RATE,
    preference = HENCE_PARAMETER_PREFERENCE,
    elasticity = HENCE_PARAMETER_ELASTICITY,
    growth = HENCE_PARAMETER_GROWTH,
};

// A parsed rate line or schedule. It can be moved, not copied; any number of threads may use one.
class basis {
public:
    // The base year is needed where the line has edges in calendar years, the length where its rates go by the length
    // of the project; 0 where they are not.
    explicit basis(const std::string &line, std::int32_t base_year = 0, double length = 0) {
        hence_basis *made = nullptr;
        call(hence_basis_parse_at, line.c_str(), base_year, length, &made);
        handle_.reset(made);
    }

    // The line that parses back to the same basis.
    std::string line() const { return text(hence_basis_line, handle_.get()); }
    // The basis in words, with its source.
    std::string words() const { return text(hence_basis_describe, handle_.get()); }

    std::vector<double> factors(numbers offsets) const { return each(hence_factors, offsets); }
    std::vector<double> forward_rates(numbers offsets) const { return each(hence_forward_rates, offsets); }
    std::vector<double> mean_rates(numbers offsets) const { return each(hence_mean_rates, offsets); }

    std::vector<double> instantaneous_rates(numbers offsets) const { return each(hence_instantaneous_rates, offsets); }

    double present_value(numbers offsets, numbers flows) const {
        same_size(offsets, flows);
        double value = 0;
        call(hence_present_value, handle_.get(), offsets.data(), flows.data(), flows.size(), &value);
        return value;
    }

    // Flows row-major, a stream a row of as many flows as there are offsets; a value a row.
    std::vector<double> present_values(numbers offsets, numbers flows) const {
        const std::size_t n = offsets.size();
        if (n == 0 || flows.size() % n != 0) throw std::invalid_argument("the flows are not whole rows");
        std::vector<double> values(flows.size() / n);
        call(hence_present_values, handle_.get(), offsets.data(), flows.data(), values.size(), n, values.data());
        return values;
    }

    double annual_equivalent(double value, std::int32_t service_years) const {
        return number(hence_annual_equivalent, handle_.get(), value, service_years);
    }

    // Every value of a parameter at which the flows are worth nothing; for two options to swap, the flows of one less those
    // of the other. Where there are more values than expected, the error says how many, and the call is made again.
    std::vector<double> switching_values(parameter of, numbers offsets, numbers flows, double lowest,
                                         double highest) const {
        same_size(offsets, flows);
        std::vector<double> values(8);
        for (;;) {
            std::size_t count = 0;
            try {
                call(hence_switching_values, handle_.get(), static_cast<std::int32_t>(of), offsets.data(),
                     flows.data(), flows.size(), lowest, highest, values.data(), values.size(), &count);
            } catch (const error &e) {
                if (e.code != HENCE_ERR_CAPACITY) throw;
                values.resize(static_cast<std::size_t>(e.index));
                continue;
            }
            values.resize(count);
            return values;
        }
    }

private:
    struct freed {
        void operator()(hence_basis *basis) const { hence_basis_free(basis); }
    };

    template <class Function>
    std::vector<double> each(Function function, numbers offsets) const {
        std::vector<double> out(offsets.size());
        call(function, handle_.get(), offsets.data(), offsets.size(), out.data());
        return out;
    }

    std::unique_ptr<hence_basis, freed> handle_;
};

inline std::vector<double> offsets_from_years(numbers years, double base, const std::string &timing) {
    std::vector<double> offsets(years.size());
    call(hence_offsets_from_years, years.data(), years.size(), base, timing.c_str(), offsets.data());
    return offsets;
}

// Dates as numbers, 20260401 for 1 April 2026; the day count by its name, "actual/365" for one.
inline std::vector<double> offsets_from_dates(const std::vector<std::int32_t> &dates, std::int32_t base,
                                              const std::string &day_count = "anniversaries") {
    std::vector<double> offsets(dates.size());
    call(hence_offsets_from_dates, dates.data(), dates.size(), base, day_count.c_str(), offsets.data());
    return offsets;
}

// The rate line of a built-in schedule, its timing included.
inline std::string schedule_line(const std::string &id) { return text(hence_schedule_line, id.c_str()); }

// Every internal rate of return between two rates; there cannot be more than flows.
inline std::vector<double> irr_all(numbers offsets, numbers flows, double lowest = -0.5, double highest = 1.0) {
    same_size(offsets, flows);
    std::vector<double> rates(flows.size());
    std::size_t count = 0;
    call(hence_irr_all, offsets.data(), flows.data(), flows.size(), lowest, highest, rates.data(), rates.size(),
         &count);
    rates.resize(count);
    return rates;
}

inline double ramsey_rate(double rho, double eta, double g) { return number(hence_ramsey_rate, rho, eta, g); }

// With growth that is uncertain from year to year, sd its standard deviation.
inline double ramsey_rate_uncertain(double rho, double eta, double g, double sd) {
    return number(hence_ramsey_rate_uncertain, rho, eta, g, sd);
}

inline double elasticity_from_taxes(double marginal, double average) {
    return number(hence_elasticity_from_taxes, marginal, average);
}

inline double equity_weight(double income, double reference, double elasticity) {
    return number(hence_equity_weight, income, reference, elasticity);
}

inline double real_rate(double nominal, double inflation) { return number(hence_real_rate, nominal, inflation); }

// The mean over tax brackets, weighted by taxpayers.
inline double elasticity_from_brackets(numbers marginal, numbers average, numbers weights) {
    same_size(marginal, average);
    same_size(marginal, weights);
    return number(hence_elasticity_from_brackets, marginal.data(), average.data(), weights.data(), weights.size());
}

inline double hazard_from_probability(double probability, compounding with = compounding::yearly) {
    return number(hence_hazard_from_probability, probability, code(with));
}

inline double hazard_from_waiting_time(double years, compounding with = compounding::yearly) {
    return number(hence_hazard_from_waiting_time, years, code(with));
}

// Of a value a year; the years themselves, where given, must follow on each other.
inline hence_growth growth(numbers consumption, const std::vector<std::int32_t> &years = {}) {
    if (!years.empty() && years.size() != consumption.size())
        throw std::invalid_argument("the arrays differ in length");
    hence_growth found{};
    found.struct_size = sizeof found;
    call(hence_growth_estimate, consumption.data(), years.empty() ? nullptr : years.data(), consumption.size(),
         &found);
    return found;
}

inline double utility(double consumption, double elasticity) { return number(hence_utility, consumption, elasticity); }

inline double marginal_utility(double consumption, double elasticity) {
    return number(hence_marginal_utility, consumption, elasticity);
}

inline double welfare(numbers consumption, numbers offsets, double rho, double elasticity,
                      compounding with = compounding::yearly) {
    same_size(consumption, offsets);
    return number(hence_welfare, consumption.data(), offsets.data(), offsets.size(), rho, elasticity, code(with));
}

inline std::vector<double> welfare_factors(numbers consumption, numbers offsets, double base, double rho,
                                           double elasticity, compounding with = compounding::yearly) {
    same_size(consumption, offsets);
    std::vector<double> factors(offsets.size());
    call(hence_welfare_factors, consumption.data(), offsets.data(), offsets.size(), base, rho, elasticity, code(with),
         factors.data());
    return factors;
}

// What must be received later for an amount given up now.
inline double compensation(double amount, double now, double later, double years, double rho, double elasticity,
                           compounding with = compounding::yearly) {
    return number(hence_compensation, amount, now, later, years, rho, elasticity, code(with));
}

// The exact value of flows that are not small: the amount at the base that changes welfare as much.
inline double equivalent_variation(numbers flows, numbers consumption, numbers factors, double base,
                                   double elasticity) {
    same_size(flows, consumption);
    same_size(flows, factors);
    return number(hence_equivalent_variation, flows.data(), consumption.data(), factors.data(), flows.size(), base,
                  elasticity);
}

// The most that could be paid for them at the base.
inline double compensating_variation(numbers flows, numbers consumption, numbers factors, double base,
                                     double base_flow, double elasticity) {
    same_size(flows, consumption);
    same_size(flows, factors);
    return number(hence_compensating_variation, flows.data(), consumption.data(), factors.data(), flows.size(), base,
                  base_flow, elasticity);
}

inline double equally_distributed_equivalent(numbers consumption, numbers shares, double elasticity) {
    same_size(consumption, shares);
    return number(hence_equally_distributed_equivalent, consumption.data(), shares.data(), shares.size(), elasticity);
}

inline double switching_multiplier(double net, double stream) {
    return number(hence_switching_multiplier, net, stream);
}

// The parts of an uncertain rate, each a value or a distribution: "1%", "normal mean 1% sd 0.3%".
struct rate_parts {
    std::string preference;
    std::string hazard;
    std::string elasticity;
    std::string growth;
};

// Values under each draw of the rate, an option a row of as many values as there are draws.
struct drawn {
    std::vector<double> rates;
    std::vector<double> values;
};

// Flows row-major, an option a row of as many flows as there are offsets. The threads do not change the results.
inline drawn draws_value(const rate_parts &of, numbers offsets, numbers flows, std::size_t count, std::uint64_t seed,
                         std::uint32_t threads = 1) {
    const std::size_t n = offsets.size();
    if (n == 0 || flows.size() % n != 0) throw std::invalid_argument("the flows are not whole rows");
    const std::size_t rows = flows.size() / n;
    drawn out{std::vector<double>(count), std::vector<double>(rows * count)};
    call(hence_draws_value, of.preference.c_str(), of.hazard.c_str(), of.elasticity.c_str(), of.growth.c_str(),
         offsets.data(), flows.data(), rows, n, count, seed, threads, out.rates.data(), out.values.data());
    return out;
}

struct spread {
    hence_spread of;
    std::vector<double> percentiles;
};

inline spread draws_spread(numbers values, numbers percentiles) {
    spread out{{}, std::vector<double>(percentiles.size())};
    out.of.struct_size = sizeof out.of;
    call(hence_draws_spread, values.data(), values.size(), percentiles.data(), percentiles.size(),
         out.percentiles.data(), &out.of);
    return out;
}

// The share of draws in which each option is first, alone and with another one.
inline std::pair<std::vector<double>, std::vector<double>> draws_rank(numbers values, std::size_t rows) {
    if (rows == 0 || values.size() % rows != 0) throw std::invalid_argument("the values are not whole rows");
    std::vector<double> alone(rows), tied(rows);
    call(hence_draws_rank, values.data(), rows, values.size() / rows, alone.data(), tied.data());
    return {alone, tied};
}

}  // namespace hence

#endif
