// Whether a measure's daily values have left what the person's own days before the week lead one
// to expect, and whether they drift. Pure: days in, numbers out.
#pragma once

#include "estimator/ewma.hpp"
#include "estimator/trend.hpp"
#include "report/calendar.hpp"

#include <optional>
#include <vector>

namespace sagitta::report {

struct DailyValue {
    Day day;
    double value;
};

struct ChartDay {
    DailyValue daily;
    estimator::EwmaPoint point;
};

/// The last stretch of days on which the chart was outside its limits on one side.
struct FlaggedChange {
    Day since;
    Day until;
    estimator::EwmaSignal direction; ///< above or below
    bool lasting;                    ///< `until` is the chart's last day
};

struct DailyTrend {
    estimator::TheilSenLine line; ///< x in weeks from the first day
    estimator::MannKendallTest test;
    std::size_t days;
};

/// The chart of one measure: days of the week against the days before it.
struct DailyChart {
    std::size_t days_before = 0;
    /// From EwmaChart::k_min_baseline days before on, when they vary.
    std::optional<estimator::EwmaBaseline> baseline;
    std::vector<ChartDay> days; ///< of the week; none without a baseline
    std::optional<FlaggedChange> flag;
    /// Over all days, from k_min_trend_points on.
    std::optional<DailyTrend> trend;
};

/// @param values  one a day, in the order of time, of the week and before it
/// @param monday  the week's first day
[[nodiscard]] DailyChart chart_of(const std::vector<DailyValue>& values, Day monday,
                                  double confidence);

} // namespace sagitta::report
