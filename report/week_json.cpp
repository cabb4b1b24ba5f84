// The week as JSON.
#include "report/table.hpp"
#include "report/week.hpp"

#include <nlohmann/json.hpp>

namespace sagitta::report {
namespace {

using Json = nlohmann::ordered_json;

constexpr std::array<const char*, k_measures> k_measure_names = {
    "implied_throughput_bit_per_s",
    "implied_throughput_half_width_bit_per_s",
    "implied_throughput_double_width_bit_per_s",
    "movement_time_ms",
    "error_px",
    "path_ratio",
    "direction_changes",
    "submovements"};

Json interval_json(const std::optional<estimator::Interval>& interval) {
    if (!interval) {
        return nullptr;
    }
    return {{"estimate", interval->estimate},
            {"low", interval->low},
            {"high", interval->high},
            {"df", interval->df}};
}

Json mean_json(const DayMean& mean) {
    return {{"days", mean.values.size()},
            {"mean", mean.mean ? Json(*mean.mean) : Json(nullptr)},
            {"low", mean.interval ? Json(mean.interval->low) : Json(nullptr)},
            {"high", mean.interval ? Json(mean.interval->high) : Json(nullptr)},
            {"values", mean.values}};
}

const char* change_name(Change change) {
    switch (change) {
    case Change::higher:
        return "higher";
    case Change::lower:
        return "lower";
    case Change::none_clear:
        return "none_clear";
    case Change::unknown:
        return "unknown";
    }
    return "unknown";
}

const char* signal_name(estimator::EwmaSignal signal) {
    switch (signal) {
    case estimator::EwmaSignal::above:
        return "above";
    case estimator::EwmaSignal::below:
        return "below";
    case estimator::EwmaSignal::none:
        return "none";
    }
    return "none";
}

Json trend_json(const std::optional<DailyTrend>& trend) {
    if (!trend) {
        return nullptr;
    }
    return {{"days", trend->days},
            {"per_week", trend->line.slope},
            {"low", trend->line.low},
            {"high", trend->line.high},
            {"mann_kendall_s", trend->test.s},
            {"mann_kendall_z", trend->test.z},
            {"mann_kendall_p", trend->test.p}};
}

Json chart_json(const DailyChart& chart) {
    Json json = {{"days_before", chart.days_before},
                 {"baseline_mean", chart.baseline ? Json(chart.baseline->mean) : Json(nullptr)},
                 {"baseline_sd", chart.baseline ? Json(chart.baseline->sd) : Json(nullptr)},
                 {"flag", nullptr},
                 {"days", Json::array()}};
    if (chart.flag) {
        json["flag"] = {{"direction", signal_name(chart.flag->direction)},
                        {"since", to_text(chart.flag->since)},
                        {"until", to_text(chart.flag->until)},
                        {"lasting", chart.flag->lasting}};
    }
    for (const ChartDay& day : chart.days) {
        json["days"].push_back({{"day", to_text(day.daily.day)},
                                {"value", day.daily.value},
                                {"statistic", day.point.statistic},
                                {"lower", day.point.lower},
                                {"upper", day.point.upper},
                                {"signal", signal_name(day.point.signal)}});
    }
    json["trend"] = trend_json(chart.trend);
    return json;
}

Json exposure_json(const ExposureSum& exposure) {
    return {{"active_s", estimator::seconds(exposure.active)},
            {"presses", exposure.presses},
            {"wheel_detents", exposure.wheel_detents},
            {"hand_travel_mm", exposure.hand_travel.value()}};
}

Json series_json(const SeriesWeek& series, WeekDetail detail) {
    Json json = {{"pointer", printable(series.pointer.name)},
                 {"kind", estimator::to_text(series.pointer.kind)},
                 {"origin", estimator::to_text(series.pointer.origin)},
                 {"cpi", series.pointer.cpi.value()},
                 {"cpi_source", estimator::to_text(series.pointer.cpi_source)},
                 {"condition", printable(series.condition)},
                 {"scored_clicks", series.clicks},
                 {"scored_drags", series.drags},
                 {"presses", series.presses},
                 {"days_with_clicks", series.days_with_clicks},
                 {"days_counted", series.days_counted},
                 {"days_counted_before", series.days_counted_before},
                 {"days_other_reference_width", series.days_other_width}};
    for (std::size_t m = 0; m < k_measures; ++m) {
        const DayComparison& comparison = series.measures[m];
        json["measures"][k_measure_names[m]] = {
            {"this_week", mean_json(comparison.now)},
            {"four_weeks_before", mean_json(comparison.before)},
            {"difference", interval_json(comparison.difference)},
            {"change", change_name(comparison.change())}};
    }
    for (std::size_t w = 0; w < k_watched.size(); ++w) {
        json["charts"][k_measure_names.at(static_cast<std::size_t>(k_watched[w]))] =
            chart_json(series.charts[w]);
    }
    if (detail == WeekDetail::by_direction) {
        for (std::size_t s = 0; s < estimator::k_sectors; ++s) {
            const SectorWeek& sector = series.sectors.at(s);
            json["directions"].push_back(
                {{"direction_deg", 45 * s},
                 {"scored_clicks", sector.clicks},
                 {"offset_percent_of_distance", mean_json(sector.offset_share)},
                 {"initial_angle_deg", mean_json(sector.initial_angle)}});
        }
    }
    if (detail == WeekDetail::by_hour) {
        for (std::size_t h = 0; h < series.hours.size(); ++h) {
            const HourOfDay& hour = series.hours.at(h);
            json["hours"].push_back({{"hour", h},
                                     {"presses", hour.presses},
                                     {"scored_clicks", hour.clicks},
                                     {"active_s", estimator::seconds(hour.active)},
                                     {"implied_throughput_bit_per_s", mean_json(hour.throughput)}});
        }
    }
    return json;
}

} // namespace

std::string week_json(const WeekSummary& week, WeekDetail detail, const Session& session) {
    const IsoWeek iso = iso_week_of(week.monday);
    Json json = {{"iso_year", iso.year},
                 {"iso_week", iso.week},
                 {"first_day", to_text(week.monday)},
                 {"last_day", to_text(week.monday + date::days{6})},
                 {"time_zone", session.calendar.zone_name()},
                 {"simulated", week.any_simulated()},
                 {"scored_movements", week.scored()},
                 {"days_with_motion", week.days_with_motion},
                 {"hours_with_motion", week.hours_with_motion},
                 {"confidence", week.confidence},
                 {"reference_width_px", week.reference_width.value()},
                 {"standard_distance_px", week.standard_distance.value()},
                 {"exposure", exposure_json(week.exposure)},
                 {"weeks_before", week.weeks_before},
                 {"exposure_a_week_before",
                  week.weeks_before > 0 ? exposure_json(week.before_a_week) : Json(nullptr)}};
    for (std::size_t o = 0; o < week.outcomes.size(); ++o) {
        json["outcomes"][std::string{to_text(static_cast<estimator::Outcome>(o))}] =
            week.outcomes[o];
    }
    const estimator::EwmaRules rules;
    json["chart_rules"] = {
        {"weight", rules.weight},
        {"width_sd", rules.width},
        {"least_days_before", estimator::EwmaChart::k_min_baseline},
        {"days_between_false_flags", estimator::k_ewma_days_between_false_signals}};
    json["pointers"] = Json::array();
    for (const SeriesWeek& series : week.series) {
        json["pointers"].push_back(series_json(series, detail));
    }
    json["note"] = "implied throughput uses a reference target width; the true width is unseen; "
                   "not ISO throughput";
    json["caution"] = "measures pointing and does not diagnose; pain, numbness or weakness are for "
                      "a clinician";
    return json.dump(2) + "\n";
}

} // namespace sagitta::report
