#include "report/daily_chart.hpp"

#include <algorithm>

namespace sagitta::report {
namespace {

using estimator::EwmaSignal;

std::optional<FlaggedChange> last_flag(const std::vector<ChartDay>& days) {
    const auto last = std::find_if(days.rbegin(), days.rend(), [](const ChartDay& day) {
        return day.point.signal != EwmaSignal::none;
    });
    if (last == days.rend()) {
        return std::nullopt;
    }
    const EwmaSignal direction = last->point.signal;
    const auto before = std::find_if(last, days.rend(), [direction](const ChartDay& day) {
        return day.point.signal != direction;
    });
    const ChartDay& first = *std::prev(before);
    return FlaggedChange{first.daily.day, last->daily.day, direction, last == days.rbegin()};
}

std::optional<DailyTrend> trend_of(const std::vector<DailyValue>& values, double confidence) {
    std::vector<double> weeks;
    std::vector<double> level;
    for (const DailyValue& value : values) {
        weeks.push_back(static_cast<double>((value.day - values.front().day).count()) / 7.0);
        level.push_back(value.value);
    }
    const auto line = estimator::theil_sen(weeks, level, confidence);
    const auto test = estimator::mann_kendall(level);
    if (!line || !test) {
        return std::nullopt;
    }
    return DailyTrend{*line, *test, values.size()};
}

} // namespace

DailyChart chart_of(const std::vector<DailyValue>& values, Day monday, double confidence) {
    DailyChart chart;
    std::vector<double> before;
    for (const DailyValue& value : values) {
        if (value.day < monday) {
            before.push_back(value.value);
        }
    }
    chart.days_before = before.size();
    chart.trend = trend_of(values, confidence);
    const auto baseline = estimator::ewma_baseline(before);
    if (!baseline) {
        return chart;
    }
    auto ewma = estimator::EwmaChart::start(*baseline);
    if (!ewma) {
        return chart;
    }
    chart.baseline = *baseline;
    for (const DailyValue& value : values) {
        if (value.day >= monday) {
            chart.days.push_back({value, ewma->add(value.value)});
        }
    }
    chart.flag = last_flag(chart.days);
    return chart;
}

} // namespace sagitta::report
