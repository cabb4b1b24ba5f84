#include "report/change_text.hpp"

#include "report/numbers.hpp"
#include "report/table.hpp"

#include <algorithm>
#include <fmt/format.h>

namespace sagitta::report {
namespace {

using estimator::EwmaChart;
using estimator::EwmaSignal;

struct WatchedText {
    const char* name;
    const char* unit;
};

WatchedText describe(Measure measure) {
    switch (measure) {
    case Measure::throughput:
        return {"implied throughput", "bit/s"};
    case Measure::movement_time:
        return {"movement time", "ms"};
    case Measure::error:
        return {"movement error", "px"};
    default:
        return {"", ""}; // not watched
    }
}

bool any_watched(const SeriesWeek& series) {
    return std::any_of(series.charts.begin(), series.charts.end(),
                       [](const DailyChart& chart) { return !chart.days.empty(); });
}

bool any_watched(const WeekSummary& week) {
    return std::any_of(week.series.begin(), week.series.end(),
                       [](const SeriesWeek& series) { return any_watched(series); });
}

std::string when_text(const FlaggedChange& flag) {
    if (flag.lasting) {
        return "since " + day_text(flag.since);
    }
    const std::string days =
        flag.since == flag.until
            ? "on " + day_text(flag.since)
            : fmt::format("from {} to {}", day_text(flag.since), day_text(flag.until));
    return days + " and is back within its limits";
}

std::string flag_line(Measure measure, const DailyChart& chart) {
    const FlaggedChange& flag = *chart.flag;
    const auto day = std::find_if(chart.days.begin(), chart.days.end(),
                                  [&](const ChartDay& one) { return one.daily.day == flag.until; });
    const WatchedText text = describe(measure);
    return under_heading(fmt::format(
        "FLAGGED: {} is {} than on the {} before, {} (running average on {}: {} {}; limits {} to "
        "{}).",
        text.name, flag.direction == EwmaSignal::above ? "higher" : "lower",
        count_of(chart.days_before, "day"), when_text(flag), day_text(flag.until),
        plain(day->point.statistic), text.unit, plain(day->point.lower), plain(day->point.upper)));
}

std::string trend_line(Measure measure, const DailyTrend& trend, const WeekSummary& week) {
    const WatchedText text = describe(measure);
    const double width = trend.line.high - trend.line.low;
    return under_heading(fmt::format("Trend: {} changes by {} {} a week ({} % interval {} to {}; "
                                     "over {}, those before included).",
                                     text.name, signed_within(trend.line.slope, width), text.unit,
                                     100.0 * week.confidence, signed_within(trend.line.low, width),
                                     signed_within(trend.line.high, width),
                                     count_of(trend.days, "day")));
}

bool leaves_out_zero(const estimator::TheilSenLine& line) {
    return line.low > 0.0 || line.high < 0.0;
}

/// The watched measures as a list in words.
std::string watched_names(const SeriesWeek& series) {
    std::vector<std::string> names;
    for (std::size_t w = 0; w < k_watched.size(); ++w) {
        if (!series.charts.at(w).days.empty()) {
            names.emplace_back(describe(k_watched.at(w)).name);
        }
    }
    std::string list = names.front();
    for (std::size_t i = 1; i < names.size(); ++i) {
        list += (i + 1 == names.size() ? " and " : ", ") + names[i];
    }
    return list;
}

} // namespace

std::string flags_in_short(const WeekSummary& week) {
    if (!any_watched(week)) {
        return "";
    }
    std::uint64_t flags = 0;
    for (const SeriesWeek& series : week.series) {
        for (const DailyChart& chart : series.charts) {
            flags += chart.flag ? 1U : 0U;
        }
    }
    if (flags == 0) {
        return "No change is flagged.";
    }
    return flags == 1 ? "One change is flagged below."
                      : fmt::format("{} are flagged below.", count_of(flags, "change"));
}

std::string change_lines(const SeriesWeek& series, const WeekSummary& week) {
    if (series.days_counted == 0) {
        return "";
    }
    std::string flags;
    std::string trends;
    for (std::size_t w = 0; w < k_watched.size(); ++w) {
        const DailyChart& chart = series.charts.at(w);
        if (chart.flag) {
            flags += flag_line(k_watched.at(w), chart);
        }
        if (chart.trend && leaves_out_zero(chart.trend->line)) {
            trends += trend_line(k_watched.at(w), *chart.trend, week);
        }
    }
    if (flags.empty() && any_watched(series)) {
        flags = under_heading(
            fmt::format("No flag: day by day, {} stayed within limits.", watched_names(series)));
    } else if (flags.empty() && series.days_counted_before > 0 &&
               series.days_counted_before < EwmaChart::k_min_baseline) {
        flags = under_heading(fmt::format("Changes cannot be flagged yet: that needs {} such days "
                                          "in the four weeks before.",
                                          EwmaChart::k_min_baseline));
    }
    return flags + trends;
}

std::string flag_note(const WeekSummary& week) {
    if (!any_watched(week)) {
        return "";
    }
    return wrapped(fmt::format(
        "A change is flagged when the running average of daily values (EWMA chart) leaves the "
        "limits that the days before set. Where nothing has changed, that happens to a measure by "
        "chance about once in {:.0f} days of use; days that are alike for another reason, such as "
        "a "
        "week of other work, raise it more often.",
        estimator::k_ewma_days_between_false_signals));
}

} // namespace sagitta::report
