#include "estimator/interval.hpp"
#include "report/first_look.hpp"
#include "report/week_summary.hpp"
#include "tests/report/hours.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace sagitta::report;
using doctest::Approx;
using namespace sagitta::test;

namespace {

const Calendar k_utc = Calendar::in_utc();
const std::vector<store::StoredCondition> k_conditions = {{store::k_unlabelled, ""}};
const std::vector<store::StoredPointer> k_pointers = {pointer_of(k_mouse, "Mouse"),
                                                      pointer_of(k_trackball, "Trackball")};

WeekSummary week_48(const std::vector<store::StoredHour>& hours) {
    WeekBuilder builder{day_of(2026, 11, 23), k_utc, {}};
    for (const store::StoredHour& hour : hours) {
        builder.add(hour);
    }
    return builder.build(k_pointers, k_conditions);
}

} // namespace

TEST_CASE("the week reads its own days and the four weeks before, no more") {
    const WeekBuilder builder{day_of(2026, 11, 23), k_utc, {}};
    CHECK(builder.selection().from == at(2026, 10, 26, 0));
    CHECK(builder.selection().to == at(2026, 11, 30, 0));
    const WeekSummary week = week_48({hour_of(at(2026, 10, 25, 23), k_mouse, 30, 800),
                                      hour_of(at(2026, 11, 30, 0), k_mouse, 30, 800)});
    CHECK(week.empty());
    CHECK(week.scored() == 0);
}

TEST_CASE("implied throughput of a day is sum of bits over sum of time, and days are the unit") {
    // Three days of very different size: the mean over days does not weigh them by clicks.
    const WeekSummary week = week_48({hour_of(at(2026, 11, 23, 9), k_mouse, 20, 1000),
                                      hour_of(at(2026, 11, 24, 9), k_mouse, 400, 800),
                                      hour_of(at(2026, 11, 25, 9), k_mouse, 20, 900)});
    const double bits = std::log2(0.8 * 180 / 20 + 1) + std::log2(1.25 * 180 / 20 + 1);
    const double root = std::sqrt(0.8) + std::sqrt(1.25);
    const std::vector<double> days = {bits / root, bits / (0.8 * root), bits / (0.9 * root)};
    REQUIRE(week.series.size() == 1);
    const DayMean& mean = week.series[0].measure(Measure::throughput).now;
    REQUIRE(mean.values.size() == 3);
    for (std::size_t i = 0; i < 3; ++i) {
        CHECK(mean.values[i] == Approx(days[i]).epsilon(1e-5));
    }
    const auto expected = estimator::mean_interval(days, 0.95).value();
    CHECK(mean.interval->estimate == Approx(expected.estimate).epsilon(1e-5));
    CHECK(mean.interval->low == Approx(expected.low).epsilon(1e-4));
    CHECK(week.series[0].measure(Measure::throughput_half_width).now.mean > mean.mean);
    CHECK(week.series[0].measure(Measure::throughput_double_width).now.mean < mean.mean);
}

TEST_CASE("movement time at the standard distance follows the slope, not the day's distances") {
    // MT = 800 ms sqrt(D / 180) on all days; only the distances differ.
    const auto with_distance = [](unsigned day, double distance) {
        return hour_of(at(2026, 11, day, 9), k_mouse, 40, 800 * std::sqrt(distance / 180),
                       distance);
    };
    const WeekSummary week =
        week_48({with_distance(23, 100), with_distance(24, 180), with_distance(25, 500)});
    const DayMean& time = week.series[0].measure(Measure::movement_time).now;
    REQUIRE(time.values.size() == 3);
    for (const double value : time.values) {
        CHECK(value == Approx(800 * std::sqrt(200.0 / 180.0)).epsilon(1e-5));
    }
    CHECK(week.series[0].measure(Measure::error).now.mean.value() == Approx(5.0));
    CHECK(week.series[0].measure(Measure::path_ratio).now.mean.value() == Approx(1.1));
    CHECK(week.series[0].measure(Measure::direction_changes).now.mean.value() == Approx(2.0));
    CHECK(week.series[0].measure(Measure::submovements).now.mean.value() == Approx(3.0));
}

TEST_CASE("a day below 20 scored clicks has no value, and under three days no interval") {
    const WeekSummary week = week_48({hour_of(at(2026, 11, 23, 9), k_mouse, 19, 800),
                                      hour_of(at(2026, 11, 24, 9), k_mouse, 20, 800),
                                      hour_of(at(2026, 11, 25, 9), k_mouse, 12, 800),
                                      hour_of(at(2026, 11, 25, 15), k_mouse, 12, 800)});
    const SeriesWeek& series = week.series.at(0);
    CHECK(series.days_with_clicks == 3);
    CHECK(series.days_counted == 2);
    CHECK(series.measure(Measure::throughput).now.mean.has_value());
    CHECK_FALSE(series.measure(Measure::throughput).now.interval.has_value());
    CHECK(series.measure(Measure::throughput).change() == Change::unknown);
}

TEST_CASE("a change is marked when the interval of the difference leaves out zero") {
    std::vector<store::StoredHour> hours;
    for (unsigned day = 2; day <= 6; ++day) { // 2 to 6 November
        hours.push_back(hour_of(at(2026, 11, day, 9), k_mouse, 40, 1000 + 3.0 * day));
    }
    for (unsigned day = 23; day <= 27; ++day) {
        hours.push_back(hour_of(at(2026, 11, day, 9), k_mouse, 40, 800 + 3.0 * day));
    }
    const WeekSummary week = week_48(hours);
    const SeriesWeek& series = week.series.at(0);
    CHECK(series.days_counted_before == 5);
    CHECK(series.measure(Measure::throughput).change() == Change::higher);
    CHECK(series.measure(Measure::movement_time).change() == Change::lower);
    const DayComparison& comparison = series.measure(Measure::throughput);
    const auto welch =
        estimator::difference_interval(comparison.now.values, comparison.before.values, 0.95)
            .value();
    CHECK(comparison.difference->low == Approx(welch.low));
    CHECK(comparison.difference->high == Approx(welch.high));
    CHECK(series.measure(Measure::submovements).change() == Change::none_clear);
    CHECK(week.weeks_before == 1);
    CHECK(week.before_a_week.presses == 200);
}

TEST_CASE("throughput leaves out days of another reference width and counts them") {
    auto other = hour_of(at(2026, 11, 23, 9), k_mouse, 40, 800);
    other.summary.reference_width = estimator::Pixels::of(30.0);
    const WeekSummary week = week_48({other, hour_of(at(2026, 11, 24, 9), k_mouse, 40, 800)});
    const SeriesWeek& series = week.series.at(0);
    CHECK(week.reference_width.value() == 20.0);
    CHECK(series.days_other_width == 1);
    CHECK(series.measure(Measure::throughput).now.values.size() == 1);
    CHECK(series.measure(Measure::movement_time).now.values.size() == 2);
    CHECK(week.scored() == 80);
}

TEST_CASE("two reference widths within one hour stay apart in throughput") {
    std::vector<store::StoredHour> hours;
    for (unsigned day = 23; day <= 25; ++day) {
        auto earlier = hour_of(at(2026, 11, day, 9), k_mouse, 40, 1600);
        earlier.summary.reference_width = estimator::Pixels::of(40.0);
        hours.push_back(earlier);
        hours.push_back(hour_of(at(2026, 11, day, 9), k_mouse, 40, 800));
    }
    const WeekSummary mixed = week_48(hours);
    const WeekSummary one_width = week_48({hours[1], hours[3], hours[5]});
    const SeriesWeek& series = mixed.series.at(0);
    CHECK(series.clicks == 240);
    CHECK(series.days_other_width == 3);
    for (const Measure measure :
         {Measure::throughput, Measure::throughput_half_width, Measure::throughput_double_width}) {
        CHECK(series.measure(measure).now.values ==
              one_width.series.at(0).measure(measure).now.values);
    }
    CHECK(series.hours[9].throughput.values == one_width.series.at(0).hours[9].throughput.values);
    CHECK(series.measure(Measure::movement_time).now.mean.value() >
          1.2 * one_width.series.at(0).measure(Measure::movement_time).now.mean.value());
}

TEST_CASE("a week's charts watch three measures against the days before") {
    std::vector<store::StoredHour> hours;
    for (unsigned day = 2; day <= 20; ++day) {
        hours.push_back(hour_of(at(2026, 11, day, 9), k_mouse, 40, 1000 + 7.0 * (day % 4)));
    }
    for (unsigned day = 23; day <= 27; ++day) {
        const double slower = day >= 25 ? 100.0 : 0.0;
        hours.push_back(
            hour_of(at(2026, 11, day, 9), k_mouse, 40, 1000 + 7.0 * (day % 4) + slower));
    }
    const SeriesWeek series = week_48(hours).series.at(0);
    const DailyChart& throughput = series.charts[0];
    const DailyChart& time = series.charts[1];
    CHECK(throughput.days_before == 19);
    REQUIRE(throughput.flag.has_value());
    CHECK(throughput.flag->since == day_of(2026, 11, 25));
    CHECK(throughput.flag->direction == estimator::EwmaSignal::below);
    REQUIRE(time.flag.has_value());
    CHECK(time.flag->direction == estimator::EwmaSignal::above);
    CHECK(time.flag->lasting);
    // ME is 5 px on every day: nothing varies, so nothing can be unusual.
    CHECK_FALSE(series.charts[2].baseline.has_value());
    CHECK(series.charts[2].days.empty());
    CHECK_FALSE(series.charts[2].flag.has_value());
}

TEST_CASE("sectors and hours of the day take days as the unit") {
    std::vector<store::StoredHour> hours;
    for (unsigned day = 23; day <= 25; ++day) {
        hours.push_back(hour_of(at(2026, 11, day, 9), k_mouse, 80, 800));
        hours.push_back(hour_of(at(2026, 11, day, 14), k_mouse, 8, 800));
    }
    const WeekSummary week = week_48(hours);
    const SeriesWeek& series = week.series.at(0);
    for (const SectorWeek& sector : series.sectors) {
        CHECK(sector.clicks == 33);
        REQUIRE(sector.offset_share.interval.has_value());
        CHECK(sector.offset_share.interval->estimate == Approx(2.0));
        CHECK(sector.initial_angle.interval->estimate == Approx(-3.0));
    }
    CHECK(series.hours[9].clicks == 240);
    CHECK(series.hours[9].throughput.interval.has_value());
    CHECK(series.hours[14].clicks == 24);
    CHECK(series.hours[14].throughput.values.empty());
    CHECK(week.hours_with_motion == 6);
    CHECK(week.days_with_motion == 3);
}

TEST_CASE("pointers stand apart, the busiest first, and hours add up over both") {
    const WeekSummary week = week_48({hour_of(at(2026, 11, 23, 9), k_mouse, 30, 800),
                                      hour_of(at(2026, 11, 23, 9), k_trackball, 50, 800)});
    REQUIRE(week.series.size() == 2);
    CHECK(week.series[0].pointer.name == "Trackball");
    CHECK(week.hours_with_motion == 1);
    CHECK(week.exposure.presses == 80);
    CHECK(week.exposure.hand_travel.value() == Approx(800.0));
    CHECK(week.outcomes[0] == 80);
}

TEST_CASE("a first look gives the difference of two pointers only from three days each") {
    FirstLookBuilder builder{k_utc, 0.95};
    for (unsigned day = 2; day <= 4; ++day) {
        builder.add(hour_of(at(2026, 11, day, 9), k_mouse, 40, 800 + 5.0 * day));
    }
    builder.add(hour_of(at(2026, 11, 5, 9), k_trackball, 40, 1000));
    CHECK_FALSE(builder.build(k_pointers).difference[1].has_value());
    builder.add(hour_of(at(2026, 11, 6, 9), k_trackball, 40, 1010));
    builder.add(hour_of(at(2026, 11, 9, 9), k_trackball, 40, 1005));
    const FirstLook look = builder.build(k_pointers);
    REQUIRE(look.difference[1].has_value());
    CHECK(look.difference[1]->high < 0.0); // the trackball is slower
    CHECK(look.pointers[1].clicks == 120);
}
