// The statistics of a week, from hour rows alone: sums for coverage and exposure, and for each
// pointer and condition a mean over days with its interval, beside the four weeks before.
// Pure: hours in, numbers out.
#pragma once

#include "estimator/interval.hpp"
#include "report/calendar.hpp"
#include "report/daily_chart.hpp"
#include "store/store.hpp"

#include <array>
#include <map>
#include <memory>
#include <optional>
#include <set>
#include <string_view>
#include <utility>
#include <vector>

namespace sagitta::report {

constexpr int k_weeks_before = 4;
/// A day's value counts from this many scored clicks on.
constexpr std::uint64_t k_min_day_clicks = 20;
/// A day's value of one sector counts from this many scored clicks in it on.
constexpr std::uint64_t k_min_sector_clicks = 5;
/// A mean over fewer days is shown without an interval.
constexpr std::size_t k_min_days = 3;

/// Values, one a day, and their mean.
struct DayMean {
    std::vector<double> values;
    std::optional<double> mean;                  ///< from one day on
    std::optional<estimator::Interval> interval; ///< from k_min_days on
};
[[nodiscard]] DayMean mean_over_days(std::vector<double> values, double confidence);

/// How this week stands to the four weeks before, judged by whether the interval of the difference
/// leaves out zero.
enum class Change { unknown, none_clear, higher, lower };

struct DayComparison {
    DayMean now;
    DayMean before;
    std::optional<estimator::Interval> difference; ///< now - before, Welch
    [[nodiscard]] Change change() const;
};

/// The measures of a week, in the order in which they are shown.
enum class Measure {
    throughput,              ///< bit/s, at the reference width W
    throughput_half_width,   ///< at W/2
    throughput_double_width, ///< at 2 W
    movement_time,           ///< ms, at the standard distance
    error,                   ///< ME, px, at the standard distance
    path_ratio,              ///< L/D, geometric mean
    direction_changes,       ///< MDC a movement
    submovements             ///< a movement
};
constexpr std::size_t k_measures = 8;
/// The measures whose daily values are watched for changes.
constexpr std::array<Measure, 3> k_watched = {Measure::throughput, Measure::movement_time,
                                              Measure::error};

struct SectorWeek {
    std::uint64_t clicks = 0;
    DayMean offset_share;  ///< MO/D in percent, + = left of the task axis
    DayMean initial_angle; ///< deg, + = left of the task axis
};

struct HourOfDay {
    std::uint64_t presses = 0;
    std::uint64_t clicks = 0; ///< scored
    estimator::Micros active{};
    DayMean throughput; ///< bit/s at the reference width
};

/// One pointer under one condition.
struct SeriesWeek {
    store::StoredPointer pointer;
    std::string condition;    ///< "" = unlabelled
    std::uint64_t clicks = 0; ///< scored, this week
    std::uint64_t drags = 0;  ///< scored, this week
    std::uint64_t presses = 0;
    std::size_t days_with_clicks = 0;    ///< this week, any number of scored clicks
    std::size_t days_counted = 0;        ///< of these, with k_min_day_clicks or more
    std::size_t days_counted_before = 0; ///< in the four weeks before
    /// Days left out of throughput since they were recorded with another reference width.
    std::size_t days_other_width = 0;
    std::array<DayComparison, k_measures> measures{};
    std::array<DailyChart, k_watched.size()> charts{}; ///< as k_watched
    std::array<SectorWeek, estimator::k_sectors> sectors{};
    std::array<HourOfDay, 24> hours{};

    [[nodiscard]] const DayComparison& measure(Measure which) const {
        return measures.at(static_cast<std::size_t>(which));
    }
};

/// What the hand was asked for.
struct ExposureSum {
    estimator::Micros active{};
    std::uint64_t presses = 0;
    double wheel_detents = 0.0;
    estimator::Millimetres hand_travel = estimator::Millimetres::zero();
};

struct WeekSummary {
    Day monday{};
    estimator::Pixels reference_width = estimator::Pixels::of(20.0);
    estimator::Pixels standard_distance = estimator::Pixels::of(200.0);
    double confidence = 0.95;

    estimator::OutcomeCounts outcomes{};
    std::size_t days_with_motion = 0;
    std::size_t hours_with_motion = 0;
    ExposureSum exposure;
    std::size_t weeks_before = 0;   ///< of the four, those with any motion
    ExposureSum before_a_week;      ///< mean over these weeks
    std::vector<SeriesWeek> series; ///< the busiest first; those with any motion or press this week

    [[nodiscard]] bool empty() const { return series.empty(); }
    [[nodiscard]] std::uint64_t scored() const;
    [[nodiscard]] std::uint64_t all_outcomes() const;
    [[nodiscard]] bool any_simulated() const;
};

struct WeekRules {
    estimator::Pixels standard_distance = estimator::Pixels::of(200.0);
    double confidence = 0.95;
};

/// Takes hours one by one, in the order of time, and holds a day's sums for each series.
class WeekBuilder {
public:
    /// @param calendar  outlives the builder
    WeekBuilder(Day monday, const Calendar& calendar, const WeekRules& rules);
    ~WeekBuilder();
    WeekBuilder(const WeekBuilder&) = delete;
    WeekBuilder& operator=(const WeekBuilder&) = delete;

    /// The hours that the summary needs: the week and the four weeks before it.
    [[nodiscard]] store::Selection selection() const;
    /// Hours outside the selection are not looked at.
    void add(const store::StoredHour& hour);
    [[nodiscard]] WeekSummary build(const std::vector<store::StoredPointer>& pointers,
                                    const std::vector<store::StoredCondition>& conditions) const;

private:
    struct DaySums;
    struct State;
    std::unique_ptr<State> m_state;
};

} // namespace sagitta::report
