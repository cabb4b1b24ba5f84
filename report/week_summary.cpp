#include "report/week_summary.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

namespace sagitta::report {
namespace {

using estimator::HourSummary;
using estimator::Micros;
using estimator::Outcome;
using estimator::Pixels;

/// Sums for implied throughput at W/2, W and 2W.
struct DifficultySums {
    std::uint64_t clicks = 0;
    Micros movement_time{};
    std::array<double, 3> bits{};

    void add(const HourSummary& hour) {
        clicks += hour.clicks;
        movement_time += hour.movement_time;
        for (std::size_t i = 0; i < bits.size(); ++i) {
            bits[i] += hour.difficulty_bits[i];
        }
    }
    [[nodiscard]] bool counts() const {
        return clicks >= k_min_day_clicks && movement_time > Micros{0};
    }
    [[nodiscard]] double throughput(std::size_t width) const {
        return bits.at(width) / estimator::seconds(movement_time);
    }
};
using SumsByWidth = std::map<double, DifficultySums>;

std::size_t index_of(Outcome outcome) {
    return static_cast<std::size_t>(outcome);
}

/// Slope common to all days: sum of products over sum of squares, both within days.
double pooled_slope(double m_xy, double m2_x) {
    return m2_x > 0.0 ? m_xy / m2_x : 0.0;
}

/// Geometric mean of y where x is `log_x`, moved there along the slope.
double value_at(const estimator::PairMoments& moments, double slope, double log_x) {
    return std::exp(moments.mean_y + slope * (log_x - moments.mean_x));
}

DayComparison compare_days(const std::vector<DailyValue>& values, Day monday, double confidence) {
    std::vector<double> now;
    std::vector<double> before;
    for (const DailyValue& value : values) {
        (value.day >= monday ? now : before).push_back(value.value);
    }
    DayComparison comparison;
    if (now.size() >= k_min_days && before.size() >= k_min_days) {
        if (auto difference = estimator::difference_interval(now, before, confidence)) {
            comparison.difference = *difference;
        }
    }
    comparison.now = mean_over_days(std::move(now), confidence);
    comparison.before = mean_over_days(std::move(before), confidence);
    return comparison;
}

} // namespace

DayMean mean_over_days(std::vector<double> values, double confidence) {
    DayMean mean;
    if (!values.empty()) {
        mean.mean =
            std::accumulate(values.begin(), values.end(), 0.0) / static_cast<double>(values.size());
    }
    if (values.size() >= k_min_days) {
        if (auto interval = estimator::mean_interval(values, confidence)) {
            mean.interval = *interval;
        }
    }
    mean.values = std::move(values);
    return mean;
}

Change DayComparison::change() const {
    if (!difference) {
        return Change::unknown;
    }
    if (difference->low > 0.0) {
        return Change::higher;
    }
    return difference->high < 0.0 ? Change::lower : Change::none_clear;
}

std::uint64_t WeekSummary::scored() const {
    return outcomes[index_of(Outcome::scored_click)] + outcomes[index_of(Outcome::scored_drag)];
}

std::uint64_t WeekSummary::all_outcomes() const {
    return std::accumulate(outcomes.begin(), outcomes.end(), std::uint64_t{0});
}

bool WeekSummary::any_simulated() const {
    return std::any_of(series.begin(), series.end(), [](const SeriesWeek& one) {
        return one.pointer.origin == estimator::Origin::simulated;
    });
}

/// One day of one series.
struct WeekBuilder::DaySums {
    HourSummary sums;
    SumsByWidth by_width;
    std::array<SumsByWidth, 24> hours;
    std::array<std::uint64_t, 24> presses{};
    std::array<std::uint64_t, 24> clicks{};
    std::array<Micros, 24> active{};

    void add(const HourSummary& hour, std::size_t hour_of_day) {
        by_width[hour.reference_width.value()].add(hour);
        hours.at(hour_of_day)[hour.reference_width.value()].add(hour);
        presses.at(hour_of_day) += hour.presses;
        clicks.at(hour_of_day) += hour.clicks;
        active.at(hour_of_day) += hour.active;
        // The sums by width are kept above, so what is merged here may take any width.
        HourSummary same_width = hour;
        same_width.reference_width = sums.reference_width;
        sums.merge(same_width);
    }
};

struct WeekBuilder::State {
    using SeriesKey = std::pair<store::PointerId, store::ConditionId>;

    Day monday;
    const Calendar* calendar;
    WeekRules rules;
    std::map<SeriesKey, std::map<Day, DaySums>> series;
    std::set<UtcTime> hours_with_motion; ///< of the week
    std::optional<Pixels> last_width;    ///< of the last hour with scored clicks

    [[nodiscard]] Day next_monday() const { return monday + date::days{7}; }
    [[nodiscard]] Day first_before() const { return monday - date::days{7 * k_weeks_before}; }
    [[nodiscard]] bool is_now(Day day) const { return day >= monday; }

    void fill_series(SeriesWeek& week, const std::map<Day, DaySums>& days, Pixels width) const;
    void fill_measures(SeriesWeek& week, const std::map<Day, DaySums>& days, Pixels width) const;
    void fill_sectors(SeriesWeek& week, const std::map<Day, DaySums>& days) const;
    void fill_hours(SeriesWeek& week, const std::map<Day, DaySums>& days, Pixels width) const;
    void fill_totals(WeekSummary& summary) const;
};

WeekBuilder::WeekBuilder(Day monday, const Calendar& calendar, const WeekRules& rules)
    : m_state{std::make_unique<State>(State{monday, &calendar, rules, {}, {}, {}})} {}

WeekBuilder::~WeekBuilder() = default;

store::Selection WeekBuilder::selection() const {
    return {m_state->calendar->start_of(m_state->first_before()),
            m_state->calendar->start_of(m_state->next_monday()), std::nullopt};
}

void WeekBuilder::add(const store::StoredHour& hour) {
    const Day day = m_state->calendar->day_of(hour.start);
    if (day < m_state->first_before() || day >= m_state->next_monday()) {
        return;
    }
    const auto hour_of_day = static_cast<std::size_t>(m_state->calendar->hour_of(hour.start));
    m_state->series[{hour.pointer, hour.condition}][day].add(hour.summary, hour_of_day);
    if (m_state->is_now(day) && hour.summary.motion_reports > 0) {
        m_state->hours_with_motion.insert(hour.start);
    }
    if (hour.summary.clicks > 0) {
        m_state->last_width = hour.summary.reference_width;
    }
}

void WeekBuilder::State::fill_measures(SeriesWeek& week, const std::map<Day, DaySums>& days,
                                       Pixels width) const {
    double time_xy = 0.0, time_xx = 0.0, error_xy = 0.0, error_xx = 0.0;
    for (const auto& [day, sums] : days) {
        time_xy += sums.sums.log_distance_time.m_xy;
        time_xx += sums.sums.log_distance_time.m2_x;
        error_xy += sums.sums.log_distance_error.m_xy;
        error_xx += sums.sums.log_distance_error.m2_x;
    }
    const double time_slope = pooled_slope(time_xy, time_xx);
    const double error_slope = pooled_slope(error_xy, error_xx);
    const double log_standard = std::log(rules.standard_distance.value());

    std::array<std::vector<DailyValue>, k_measures> values;
    for (const auto& [day, sums] : days) {
        const HourSummary& all = sums.sums;
        const auto keep = [&values, date = day](Measure measure, double value) {
            values.at(static_cast<std::size_t>(measure)).push_back({date, value});
        };
        const auto same_width = sums.by_width.find(width.value());
        if (same_width != sums.by_width.end() && same_width->second.counts()) {
            keep(Measure::throughput_half_width, same_width->second.throughput(0));
            keep(Measure::throughput, same_width->second.throughput(1));
            keep(Measure::throughput_double_width, same_width->second.throughput(2));
        }
        if (all.clicks < k_min_day_clicks) {
            continue;
        }
        ++(is_now(day) ? week.days_counted : week.days_counted_before);
        week.days_other_width +=
            same_width == sums.by_width.end() || same_width->second.clicks < all.clicks ? 1U : 0U;
        keep(Measure::movement_time,
             1000.0 * value_at(all.log_distance_time, time_slope, log_standard));
        keep(Measure::error, value_at(all.log_distance_error, error_slope, log_standard));
        keep(Measure::path_ratio, std::exp(all.log_path_ratio.mean));
        keep(Measure::direction_changes, all.direction_changes.mean);
        keep(Measure::submovements, all.submovements.mean);
    }
    for (std::size_t m = 0; m < k_measures; ++m) {
        week.measures[m] = compare_days(values[m], monday, rules.confidence);
    }
    for (std::size_t w = 0; w < k_watched.size(); ++w) {
        week.charts[w] =
            chart_of(values.at(static_cast<std::size_t>(k_watched[w])), monday, rules.confidence);
    }
}

void WeekBuilder::State::fill_sectors(SeriesWeek& week, const std::map<Day, DaySums>& days) const {
    for (std::size_t s = 0; s < estimator::k_sectors; ++s) {
        std::vector<double> offsets;
        std::vector<double> angles;
        for (const auto& [day, sums] : days) {
            const estimator::SectorSummary& sector = sums.sums.sectors.at(s);
            if (!is_now(day)) {
                continue;
            }
            week.sectors.at(s).clicks += sector.offset_share.n;
            if (sector.offset_share.n >= k_min_sector_clicks) {
                offsets.push_back(100.0 * sector.offset_share.mean);
                angles.push_back(sector.initial_angle_deg.mean);
            }
        }
        week.sectors.at(s).offset_share = mean_over_days(std::move(offsets), rules.confidence);
        week.sectors.at(s).initial_angle = mean_over_days(std::move(angles), rules.confidence);
    }
}

void WeekBuilder::State::fill_hours(SeriesWeek& week, const std::map<Day, DaySums>& days,
                                    Pixels width) const {
    for (std::size_t h = 0; h < week.hours.size(); ++h) {
        HourOfDay& hour = week.hours.at(h);
        std::vector<double> throughputs;
        for (const auto& [day, sums] : days) {
            if (!is_now(day)) {
                continue;
            }
            hour.presses += sums.presses.at(h);
            hour.clicks += sums.clicks.at(h);
            hour.active += sums.active.at(h);
            const auto same_width = sums.hours.at(h).find(width.value());
            if (same_width != sums.hours.at(h).end() && same_width->second.counts()) {
                throughputs.push_back(same_width->second.throughput(1));
            }
        }
        hour.throughput = mean_over_days(std::move(throughputs), rules.confidence);
    }
}

void WeekBuilder::State::fill_series(SeriesWeek& week, const std::map<Day, DaySums>& days,
                                     Pixels width) const {
    for (const auto& [day, sums] : days) {
        if (is_now(day)) {
            week.clicks += sums.sums.clicks;
            week.drags += sums.sums.outcomes[index_of(Outcome::scored_drag)];
            week.presses += sums.sums.presses;
            week.days_with_clicks += sums.sums.clicks > 0 ? 1U : 0U;
        }
    }
    fill_measures(week, days, width);
    fill_sectors(week, days);
    fill_hours(week, days, width);
}

void WeekBuilder::State::fill_totals(WeekSummary& summary) const {
    std::set<Day> days_with_motion;
    std::set<Day> weeks_before;
    ExposureSum before;
    for (const auto& [key, days] : series) {
        for (const auto& [day, sums] : days) {
            ExposureSum& exposure = is_now(day) ? summary.exposure : before;
            exposure.active += sums.sums.active;
            exposure.presses += sums.sums.presses;
            exposure.wheel_detents += static_cast<double>(sums.sums.wheel_120ths) / 120.0;
            exposure.hand_travel += sums.sums.hand_travel;
            if (!is_now(day)) {
                weeks_before.insert(monday_of(day));
                continue;
            }
            for (std::size_t o = 0; o < summary.outcomes.size(); ++o) {
                summary.outcomes[o] += sums.sums.outcomes[o];
            }
            if (sums.sums.motion_reports > 0) {
                days_with_motion.insert(day);
            }
        }
    }
    summary.days_with_motion = days_with_motion.size();
    summary.hours_with_motion = hours_with_motion.size();
    summary.weeks_before = weeks_before.size();
    if (!weeks_before.empty()) {
        const auto weeks = static_cast<std::int64_t>(weeks_before.size());
        summary.before_a_week = {before.active / weeks,
                                 before.presses / static_cast<std::uint64_t>(weeks),
                                 before.wheel_detents / static_cast<double>(weeks),
                                 before.hand_travel / static_cast<double>(weeks)};
    }
}

WeekSummary WeekBuilder::build(const std::vector<store::StoredPointer>& pointers,
                               const std::vector<store::StoredCondition>& conditions) const {
    WeekSummary summary;
    summary.monday = m_state->monday;
    summary.standard_distance = m_state->rules.standard_distance;
    summary.confidence = m_state->rules.confidence;
    summary.reference_width = m_state->last_width.value_or(summary.reference_width);
    m_state->fill_totals(summary);
    for (const auto& [key, days] : m_state->series) {
        if (days.rbegin()->first < m_state->monday) {
            continue; // nothing this week
        }
        const auto pointer = std::find_if(pointers.begin(), pointers.end(),
                                          [&](const auto& p) { return p.id == key.first; });
        if (pointer == pointers.end()) {
            continue; // the store's foreign keys forbid it
        }
        const auto condition = std::find_if(conditions.begin(), conditions.end(),
                                            [&](const auto& c) { return c.id == key.second; });
        SeriesWeek week{*pointer, condition == conditions.end() ? "" : condition->label};
        m_state->fill_series(week, days, summary.reference_width);
        summary.series.push_back(std::move(week));
    }
    std::stable_sort(summary.series.begin(), summary.series.end(),
                     [](const SeriesWeek& a, const SeriesWeek& b) {
                         return a.clicks != b.clicks ? a.clicks > b.clicks : a.presses > b.presses;
                     });
    return summary;
}

} // namespace sagitta::report
