#include "estimator/ewma.hpp"
#include "estimator/hand/random.hpp"
#include "estimator/moments.hpp"

#include <cmath>
#include <doctest/doctest.h>
#include <vector>

namespace sagitta::estimator {
namespace {

/// Days until the first signal when nothing changes.
int run_length(EwmaChart chart, hand::Random& random) {
    int days = 1;
    while (chart.add(random.normal()).signal == EwmaSignal::none) {
        ++days;
    }
    return days;
}

/// A baseline of `values` steady days, whose true mean is 0 and deviation 1.
EwmaBaseline drawn_baseline(std::size_t values, hand::Random& random) {
    std::vector<double> days(values);
    for (double& day : days) {
        day = random.normal();
    }
    return ewma_baseline(days).value();
}

/// Share of weeks of `days` steady days with a signal.
double false_weeks(std::size_t baseline_values, bool counts_its_error, int days) {
    constexpr int k_weeks = 20'000;
    hand::Random random{7};
    int signalled = 0;
    for (int week = 0; week < k_weeks; ++week) {
        EwmaBaseline baseline{0.0, 1.0, 0};
        if (baseline_values > 0) {
            baseline = drawn_baseline(baseline_values, random);
            baseline.values = counts_its_error ? baseline.values : 0;
        }
        EwmaChart chart = EwmaChart::start(baseline).value();
        bool any = false;
        for (int day = 0; day < days; ++day) {
            any = chart.add(random.normal()).signal != EwmaSignal::none || any;
        }
        signalled += any ? 1 : 0;
    }
    return static_cast<double>(signalled) / k_weeks;
}

TEST_CASE("with a known baseline false signals are as rare as published") {
    const EwmaChart chart = EwmaChart::start({0.0, 1.0, 0}).value();
    hand::Random random{20261101};
    Moments lengths;
    for (int i = 0; i < 1500; ++i) {
        lengths.add(run_length(chart, random));
    }
    const double error = std::sqrt(lengths.variance() / static_cast<double>(lengths.n));
    CHECK(std::abs(lengths.mean - k_ewma_days_between_false_signals) < 3.0 * error);
    CHECK(error < 0.03 * k_ewma_days_between_false_signals);
}

TEST_CASE("an estimated baseline raises false signals unless its own error is counted in") {
    const double known = false_weeks(0, false, 7);
    const double naive = false_weeks(10, false, 7);
    const double counted = false_weeks(10, true, 7);
    MESSAGE("share of steady weeks signalled: known " << known << ", naive " << naive
                                                      << ", counted " << counted);
    CHECK(naive > 3.0 * known);
    CHECK(counted < 1.2 * known);
    CHECK(counted > 0.4 * known);
}

TEST_CASE("a shift of one deviation is signalled in the direction in which it went") {
    for (const double shift : {-1.5, 1.5}) {
        EwmaChart chart = EwmaChart::start({10.0, 1.0, 20}).value();
        EwmaPoint point{};
        int day = 0;
        do {
            point = chart.add(10.0 + shift);
            ++day;
        } while (point.signal == EwmaSignal::none && day < 100);
        CHECK(day > 2);
        CHECK(day < 30);
        CHECK(point.signal == (shift > 0 ? EwmaSignal::above : EwmaSignal::below));
        CHECK((point.statistic - 10.0) * shift > 0.0);
    }
}

TEST_CASE("limits of a long baseline near those of a known one, and a short one has wider ones") {
    EwmaChart known = EwmaChart::start({5.0, 2.0, 0}).value();
    EwmaChart lasting = EwmaChart::start({5.0, 2.0, 100'000}).value();
    EwmaChart brief = EwmaChart::start({5.0, 2.0, 10}).value();
    for (int day = 0; day < 30; ++day) {
        const EwmaPoint exact = known.add(5.0);
        CHECK(lasting.add(5.0).upper == doctest::Approx(exact.upper).epsilon(1e-4));
        CHECK(brief.add(5.0).upper - 5.0 > 1.3 * (exact.upper - 5.0));
    }
}

TEST_CASE("a chart refuses a baseline that is short, constant or not a number, and odd rules") {
    const std::vector<double> nine = {1, 2, 3, 4, 5, 6, 7, 8, 9};
    CHECK(ewma_baseline(nine).error().code == ErrorCode::too_few);
    CHECK(ewma_baseline(std::vector<double>(12, 3.0)).error().code == ErrorCode::bad_value);
    std::vector<double> broken(12, 3.0);
    broken[4] = std::nan("");
    CHECK(ewma_baseline(broken).error().code == ErrorCode::bad_value);
    std::vector<double> ten = nine;
    ten.push_back(10);
    const EwmaBaseline baseline = ewma_baseline(ten).value();
    CHECK(baseline.mean == doctest::Approx(5.5));
    CHECK(baseline.sd == doctest::Approx(std::sqrt(82.5 / 9.0)));
    CHECK(EwmaChart::start({0.0, 0.0, 0}).error().code == ErrorCode::bad_value);
    CHECK(EwmaChart::start({0.0, 1.0, 1}).error().code == ErrorCode::bad_value);
    CHECK(EwmaChart::start(baseline, {0.0, 3.0}).error().code == ErrorCode::bad_value);
    CHECK(EwmaChart::start(baseline, {1.1, 3.0}).error().code == ErrorCode::bad_value);
    CHECK(EwmaChart::start(baseline, {0.2, 0.0}).error().code == ErrorCode::bad_value);
}

} // namespace
} // namespace sagitta::estimator
