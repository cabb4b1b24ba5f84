#include "estimator/hand/random.hpp"
#include "report/daily_chart.hpp"
#include "tests/report/hours.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace sagitta::report;
using estimator::EwmaSignal;
using test::day_of;

namespace {

const Day k_monday = day_of(2026, 11, 23);

/// Twenty work days before the week, about 3.0, and five of the week as given.
std::vector<DailyValue> weeks_with(const std::vector<double>& week) {
    std::vector<DailyValue> values;
    int i = 0;
    for (int back = 28; back > 0; --back) {
        const Day day = k_monday - date::days{back};
        if (back % 7 != 1 && back % 7 != 2) { // no weekends
            values.push_back({day, 3.0 + 0.1 * (i++ % 5 - 2)});
        }
    }
    for (std::size_t d = 0; d < week.size(); ++d) {
        values.push_back({k_monday + date::days{static_cast<int>(d)}, week[d]});
    }
    return values;
}

} // namespace

TEST_CASE("a week like the days before is not flagged") {
    const DailyChart chart = chart_of(weeks_with({2.9, 3.1, 3.2, 2.8, 3.0}), k_monday, 0.95);
    CHECK(chart.days_before == 20);
    REQUIRE(chart.baseline.has_value());
    CHECK(chart.baseline->mean == doctest::Approx(3.0));
    CHECK(chart.days.size() == 5);
    CHECK_FALSE(chart.flag.has_value());
    REQUIRE(chart.trend.has_value());
    CHECK(chart.trend->days == 25);
    CHECK(chart.trend->line.low <= 0.0);
    CHECK(chart.trend->line.high >= 0.0);
}

TEST_CASE("a flag says since when, in which direction and that it lasts") {
    const DailyChart chart = chart_of(weeks_with({3.0, 3.0, 2.3, 2.3, 2.3}), k_monday, 0.95);
    REQUIRE(chart.flag.has_value());
    CHECK(chart.flag->direction == EwmaSignal::below);
    CHECK(chart.flag->since >= day_of(2026, 11, 25));
    CHECK(chart.flag->since <= day_of(2026, 11, 26));
    CHECK(chart.flag->until == day_of(2026, 11, 27));
    CHECK(chart.flag->lasting);
}

TEST_CASE("a change that went back within the limits says until when") {
    const DailyChart chart = chart_of(weeks_with({4.0, 3.0, 2.8, 2.8, 2.8}), k_monday, 0.95);
    REQUIRE(chart.flag.has_value());
    CHECK(chart.flag->direction == EwmaSignal::above);
    CHECK(chart.flag->since == k_monday);
    CHECK(chart.flag->until < day_of(2026, 11, 27));
    CHECK_FALSE(chart.flag->lasting);
}

TEST_CASE(
    "with fewer than ten days before there is no chart, with fewer than ten at all no trend") {
    std::vector<DailyValue> values = weeks_with({1.0, 1.0, 1.0});
    values.erase(values.begin(), values.begin() + 11); // 9 days before
    const DailyChart chart = chart_of(values, k_monday, 0.95);
    CHECK(chart.days_before == 9);
    CHECK_FALSE(chart.baseline.has_value());
    CHECK(chart.days.empty());
    CHECK_FALSE(chart.flag.has_value());
    CHECK(chart.trend.has_value());
    values.erase(values.begin(), values.begin() + 3);
    CHECK_FALSE(chart_of(values, k_monday, 0.95).trend.has_value());
    CHECK_FALSE(chart_of({}, k_monday, 0.95).trend.has_value());
}

TEST_CASE("the trend is told in units a week, whatever days are missing") {
    std::vector<DailyValue> values = weeks_with({});
    for (DailyValue& value : values) {
        value.value = 3.0 + 0.07 * static_cast<double>((value.day - values.front().day).count());
    }
    const DailyChart chart = chart_of(values, k_monday, 0.95);
    REQUIRE(chart.trend.has_value());
    CHECK(chart.trend->line.slope == doctest::Approx(0.49));
    CHECK(chart.trend->test.p < 1e-6);
}

TEST_CASE("a steady hand's weeks are flagged about as seldom as the screen says") {
    constexpr int k_weeks = 4000;
    estimator::hand::Random random{5};
    int flagged = 0;
    for (int week = 0; week < k_weeks; ++week) {
        std::vector<DailyValue> values = weeks_with({0, 0, 0, 0, 0});
        for (DailyValue& value : values) {
            value.value = 3.0 + 0.1 * random.normal();
        }
        flagged += chart_of(values, k_monday, 0.95).flag ? 1 : 0;
    }
    const double days_between = 5.0 * k_weeks / flagged;
    CHECK(days_between > 0.7 * estimator::k_ewma_days_between_false_signals);
    CHECK(days_between < 1.4 * estimator::k_ewma_days_between_false_signals);
}
