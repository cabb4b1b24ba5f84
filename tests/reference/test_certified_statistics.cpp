// Means, variances, lines and intervals against certified and recomputed values.
#include "estimator/interval.hpp"
#include "estimator/moments.hpp"
#include "estimator/regression.hpp"
#include "tests/reference/data_file.hpp"

#include <doctest/doctest.h>

#include <cmath>

namespace sagitta::estimator {
namespace {

Moments moments_of(const std::vector<double>& values) {
    Moments moments;
    for (const double value : values) {
        moments.add(value);
    }
    return moments;
}

double relative_error(double found, double expected) {
    return std::abs(found - expected) / std::abs(expected);
}

/// The formula that running moments must not use: sum of squares less n times the squared mean.
double naive_variance(const std::vector<double>& values) {
    double sum = 0.0;
    double squares = 0.0;
    for (const double value : values) {
        sum += value;
        squares += value * value;
    }
    const double n = static_cast<double>(values.size());
    return (squares - sum * sum / n) / (n - 1.0);
}

// Source: NIST StRD, NumAcc3 and NumAcc4: 1001 values, `centre` first, then centre - .1 and
// centre + .1 in turn. Certified mean `centre`, standard deviation .1 (from memory, confirmed by
// exact rational arithmetic on the data).
std::vector<double> num_acc(double centre) {
    const double below = centre == 1000000.2 ? 1000000.1 : 10000000.1;
    const double above = centre == 1000000.2 ? 1000000.3 : 10000000.3;
    std::vector<double> values{centre};
    for (int i = 0; i < 500; ++i) {
        values.push_back(below);
        values.push_back(above);
    }
    return values;
}

TEST_CASE("running moments give NIST's mean and deviation where the naive formula fails") {
    for (const double centre : {1000000.2, 10000000.2}) {
        CAPTURE(centre);
        const std::vector<double> values = num_acc(centre);
        REQUIRE(values.size() == 1001);
        const Moments moments = moments_of(values);
        CHECK(relative_error(moments.mean, centre) < 1e-15);
        CHECK(relative_error(std::sqrt(moments.variance()), 0.1) < 1e-8);
        CHECK(relative_error(naive_variance(values), 0.01) > 1e-3);
    }
}

TEST_CASE("running moments give NIST's Michelso mean and deviation") {
    // Source: NIST StRD, Michelso (from memory; recomputed from the data).
    const tests::DataFile data{"michelso_morley.csv"};
    const Moments moments = moments_of(data.column("y"));
    CHECK(moments.n == 100);
    CHECK(relative_error(moments.mean, 299.8524) < 1e-14);
    CHECK(relative_error(std::sqrt(moments.variance()), .0790105478190518) < 1e-11);
}

void check_norris(const Result<Line>& line) {
    // Source: NIST StRD, Norris; certified.
    REQUIRE(line.has_value());
    CHECK(relative_error(line->intercept, -0.262323073774029) < 1e-9);
    CHECK(relative_error(line->slope, 1.00211681802045) < 1e-9);
    CHECK(relative_error(line->intercept_se, 0.232818234301152) < 1e-9);
    CHECK(relative_error(line->slope_se, 0.429796848199937E-03) < 1e-9);
    CHECK(relative_error(line->residual_sd, 0.884796396144373) < 1e-9);
    CHECK(relative_error(line->r * line->r, 0.999993745883712) < 1e-9);
}

TEST_CASE("a line through NIST's Norris data has the certified coefficients and errors") {
    const tests::XY data = tests::read_strd_pairs("nist_Norris.dat");
    REQUIRE(data.x.size() == 36);
    check_norris(fit_line(data.x, data.y));
    PairMoments moments;
    for (std::size_t i = 0; i < data.x.size(); ++i) {
        moments.add(data.x[i], data.y[i]);
    }
    check_norris(fit_line(moments));
}

// Source: "Student" (1908), extra sleep under two drugs, as R's data set `sleep`.
const std::vector<double> k_sleep_1 = {.7, -1.6, -.2, -1.2, -.1, 3.4, 3.7, .8, 0.0, 2.0};
const std::vector<double> k_sleep_2 = {1.9, .8, 1.1, .1, -.1, 4.4, 5.5, 1.6, 4.6, 3.4};

TEST_CASE("Welch's interval on the sleep data agrees with R") {
    // Source: R 4.2.2 t.test: p = .079394, so the interval of confidence 1 - p ends at 0. Its
    // printed df 17.776 and 95 % interval are from memory.
    const auto to_p = difference_interval(k_sleep_1, k_sleep_2, 1.0 - .079394);
    REQUIRE(to_p.has_value());
    CHECK(std::abs(to_p->high) < 5e-6);
    const auto found = difference_interval(k_sleep_1, k_sleep_2, 0.95);
    REQUIRE(found.has_value());
    CHECK(std::abs(found->estimate - -1.58) < 1e-12);
    CHECK(std::abs(found->df - 17.776) < 5e-4);
    CHECK(std::abs(found->low - -3.3654832) < 5e-8);
    CHECK(std::abs(found->high - 0.2054832) < 5e-8);
}

TEST_CASE("the interval of the paired sleep differences agrees with R") {
    // Source: R 4.2.2 t.test, paired: t = 4.062127683, p = .00283289.
    std::vector<double> differences;
    for (std::size_t i = 0; i < k_sleep_1.size(); ++i) {
        differences.push_back(k_sleep_2[i] - k_sleep_1[i]);
    }
    const auto found = mean_interval(differences, 1.0 - .00283289);
    REQUIRE(found.has_value());
    CHECK(std::abs(found->estimate - 1.58) < 1e-12);
    CHECK(found->df == 9.0);
    CHECK(std::abs(found->low) < 5e-6);
    // The half width is t standard errors, and the estimate is t standard errors from 0.
    CHECK((found->high - found->low) / 2.0 == doctest::Approx(1.58).epsilon(5e-6));
}

// Source: invented values; tests computed with R 4.2.2 t.test, equal to statsmodels 0.13.5.
const std::vector<double> k_x = {98.5,  101.2, 99.7,  100.4, 100.9, 99.1,
                                 100.2, 99.8,  101.0, 99.6,  100.3, 100.1};
const std::vector<double> k_y = {99.9,  100.8, 100.5, 101.1, 100.2, 99.7,
                                 101.3, 100.6, 100.0, 100.9, 99.8,  100.7};

TEST_CASE("Welch's interval on the equivalence example has R's degrees of freedom and ends") {
    // One-sided p .0194904018 and 3.27543e-5 against margins of -1 and 1: the intervals of
    // confidence 1 - 2p end there.
    const auto low = difference_interval(k_x, k_y, 1.0 - 2.0 * .0194904018);
    REQUIRE(low.has_value());
    CHECK(std::abs(low->df - 19.282494764) < 1e-9);
    CHECK(std::abs(low->low - -1.0) < 1e-8);
    const auto high = difference_interval(k_x, k_y, 1.0 - 2.0 * 3.27543e-5);
    REQUIRE(high.has_value());
    CHECK(std::abs(high->high - 1.0) < 5e-6);
}

TEST_CASE("the paired interval on the equivalence example is R's") {
    std::vector<double> differences;
    for (std::size_t i = 0; i < k_x.size(); ++i) {
        differences.push_back(k_x[i] - k_y[i]);
    }
    const auto found = mean_interval(differences, 0.90);
    REQUIRE(found.has_value());
    CHECK(found->df == 11.0);
    CHECK(std::abs(found->low - -.8171437718) < 1e-9);
    CHECK(std::abs(found->high - .0338104385) < 1e-9);
}

} // namespace
} // namespace sagitta::estimator
