// The screen of sagitta week.
#include "report/change_text.hpp"
#include "report/numbers.hpp"
#include "report/table.hpp"
#include "report/week.hpp"

#include <fmt/format.h>

namespace sagitta::report {
namespace {

using estimator::Outcome;

struct MeasureText {
    std::string name;
    const char* unit;
};

MeasureText describe(Measure measure, const WeekSummary& week) {
    const double w = week.reference_width.value();
    const std::string at = fmt::format(" at {} px", week.standard_distance.value());
    switch (measure) {
    case Measure::throughput:
        return {fmt::format("implied throughput, W {} px", w), "bit/s"};
    case Measure::throughput_half_width:
        return {fmt::format("  the same, W {} px", w / 2), "bit/s"};
    case Measure::throughput_double_width:
        return {fmt::format("  the same, W {} px", 2 * w), "bit/s"};
    case Measure::movement_time:
        return {"movement time" + at, "ms"};
    case Measure::error:
        return {"movement error" + at, "px"};
    case Measure::path_ratio:
        return {"path ratio", ""};
    case Measure::direction_changes:
        return {"direction changes per movement", ""};
    case Measure::submovements:
        return {"submovements per movement", ""};
    }
    return {};
}

std::string mean_text(const DayMean& mean) {
    if (mean.interval) {
        return with_interval(*mean.interval);
    }
    return mean.mean ? plain(*mean.mean) : std::string{"-"};
}

const char* change_text(Change change) {
    switch (change) {
    case Change::higher:
        return "higher";
    case Change::lower:
        return "lower";
    case Change::none_clear:
        return "none clear";
    case Change::unknown:
        return "";
    }
    return "";
}

std::string span_of(const WeekSummary& week) {
    return fmt::format("week {} ({})", iso_week_of(week.monday).week,
                       span_text(week.monday, week.monday + date::days{6}));
}

std::string opening(const WeekSummary& week, WeekDetail detail) {
    const std::uint64_t clicks = week.outcomes[static_cast<std::size_t>(Outcome::scored_click)];
    const std::uint64_t drags = week.outcomes[static_cast<std::size_t>(Outcome::scored_drag)];
    const bool all_simulated =
        std::all_of(week.series.begin(), week.series.end(), [](const SeriesWeek& one) {
            return one.pointer.origin == estimator::Origin::simulated;
        });
    std::set<store::PointerId> pointers;
    for (const SeriesWeek& one : week.series) {
        pointers.insert(one.pointer.id);
    }
    const std::string sentence = fmt::format(
        "In {} {} made {} ({}, {}) on {} with {}.", span_of(week),
        all_simulated ? "the simulated hand" : "you", count_of(clicks + drags, "scored movement"),
        count_of(clicks, "click"), count_of(drags, "drag"), count_of(week.days_with_motion, "day"),
        count_of(pointers.size(), "pointer"));
    const std::string flags = detail == WeekDetail::summary ? flags_in_short(week) : "";
    return wrapped(flags.empty() ? sentence : sentence + " " + flags);
}

std::string empty_week(const WeekSummary& week, const Session& session,
                       std::optional<UtcTime> last_hour) {
    std::string sentence = fmt::format("In {} nothing was recorded.", span_of(week));
    if (last_hour) {
        const Day day = session.calendar.day_of(*last_hour);
        sentence += fmt::format(" The store's last hour with anything in it is on {}; see that "
                                "week with 'sagitta week --ending {}'.",
                                to_text(day), to_text(day));
    } else {
        sentence += " The store is empty; 'sagitta check' tells what keeps recording from working.";
    }
    return wrapped(sentence);
}

std::string exposure_table(const WeekSummary& week) {
    Table table{{{"", Align::left},
                 {"this week", Align::right},
                 {week.weeks_before > 0 ? "before, a week" : "", Align::right}}};
    const auto row = [&](const char* name, auto&& text) {
        table.add({name, text(week.exposure),
                   week.weeks_before > 0 ? text(week.before_a_week) : std::string{}});
    };
    table.add({"days with motion", fmt::format("{} of 7", week.days_with_motion)});
    table.add({"hours with motion", grouped(week.hours_with_motion)});
    row("active time", [](const ExposureSum& e) { return duration_text(e.active); });
    row("button presses", [](const ExposureSum& e) { return grouped(e.presses); });
    row("wheel detents", [](const ExposureSum& e) {
        return grouped(static_cast<std::uint64_t>(e.wheel_detents + 0.5));
    });
    const bool assumed =
        std::any_of(week.series.begin(), week.series.end(), [](const SeriesWeek& one) {
            return one.pointer.cpi_source == estimator::CpiSource::assumed;
        });
    row(assumed ? "hand travel (CPI assumed)" : "hand travel",
        [](const ExposureSum& e) { return length_text(e.hand_travel); });
    return table.text();
}

std::string outcome_table(const WeekSummary& week) {
    Table table{{{"", Align::left}, {"count", Align::right}, {"share", Align::right}}};
    const std::uint64_t all = week.all_outcomes();
    for (std::size_t o = 0; o < week.outcomes.size(); ++o) {
        if (week.outcomes[o] > 0) {
            table.add({std::string{explain(static_cast<Outcome>(o))}, grouped(week.outcomes[o]),
                       share(week.outcomes[o], all)});
        }
    }
    return table.text();
}

std::string series_heading(const SeriesWeek& series, const Session& session) {
    const std::string label = series.condition.empty()
                                  ? std::string{}
                                  : fmt::format(", condition {}", printable(series.condition));
    return session.style.heading(shortened(pointer_title(series.pointer) + label, 96)) + "\n";
}

/// Whether the days are enough, in words.
std::string days_sentence(const SeriesWeek& series) {
    if (series.days_counted == 0) {
        return under_heading(fmt::format("{}; no day has the {} scored clicks that a day's value "
                                         "needs, so nothing is said of how it went.",
                                         count_of(series.clicks, "scored click"),
                                         k_min_day_clicks));
    }
    std::string sentence = fmt::format("{} on {}", count_of(series.clicks, "scored click"),
                                       count_of(series.days_with_clicks, "day"));
    sentence +=
        series.days_counted == series.days_with_clicks
            ? fmt::format(", each with {} or more", k_min_day_clicks)
            : fmt::format(", {} of them with {} or more", series.days_counted, k_min_day_clicks);
    if (series.days_counted_before > 0) {
        sentence +=
            fmt::format(" ({} such {} in the four weeks before)", series.days_counted_before,
                        series.days_counted_before == 1 ? "day" : "days");
    }
    if (series.days_counted < k_min_days) {
        sentence += fmt::format(": too few days for an interval, which needs {}", k_min_days);
    } else if (series.days_counted_before == 0) {
        sentence += "; there is nothing in the four weeks before to compare with";
    } else if (series.days_counted_before < k_min_days) {
        sentence +=
            fmt::format(": too few days before for a comparison, which needs {}", k_min_days);
    }
    if (series.days_other_width > 0) {
        sentence += fmt::format("; throughput leaves out what {} recorded with another reference "
                                "width",
                                count_of(series.days_other_width, "day"));
    }
    return under_heading(sentence + ".");
}

std::string measure_table(const SeriesWeek& series, const WeekSummary& week) {
    Table table{{{"", Align::left},
                 {"", Align::left},
                 {"this week", Align::right},
                 {series.days_counted_before > 0 ? "before" : "", Align::right},
                 {"difference", Align::right},
                 {"change", Align::left}}};
    for (std::size_t m = 0; m < k_measures; ++m) {
        const DayComparison& comparison = series.measures[m];
        const MeasureText text = describe(static_cast<Measure>(m), week);
        table.add({text.name, text.unit, mean_text(comparison.now),
                   series.days_counted_before > 0 ? mean_text(comparison.before) : "",
                   comparison.difference ? signed_interval(*comparison.difference) : "",
                   change_text(comparison.change())});
    }
    return table.text();
}

const char* lean(const DayMean& mean) {
    if (!mean.interval) {
        return "";
    }
    if (mean.interval->low > 0.0) {
        return "left";
    }
    return mean.interval->high < 0.0 ? "right" : "none clear";
}

std::string direction_table(const SeriesWeek& series) {
    constexpr std::array<const char*, estimator::k_sectors> k_names = {
        "right", "right and away", "away", "left and away",
        "left",  "left and near",  "near", "right and near"};
    Table table{{{"movement to the", Align::left},
                 {"", Align::right},
                 {"clicks", Align::right},
                 {"days", Align::right},
                 {"offset, % of D", Align::right},
                 {"bow", Align::left},
                 {"initial angle, deg", Align::right},
                 {"sets out", Align::left}}};
    for (std::size_t s = 0; s < k_names.size(); ++s) {
        const SectorWeek& sector = series.sectors.at(s);
        table.add({k_names.at(s), fmt::format("{}°", 45 * s), grouped(sector.clicks),
                   std::to_string(sector.offset_share.values.size()),
                   mean_text(sector.offset_share), lean(sector.offset_share),
                   mean_text(sector.initial_angle), lean(sector.initial_angle)});
    }
    return table.text();
}

std::string hour_table(const SeriesWeek& series) {
    Table table{{{"hour", Align::left},
                 {"presses", Align::right},
                 {"scored clicks", Align::right},
                 {"active time", Align::right},
                 {"days", Align::right},
                 {"implied throughput, bit/s", Align::right}}};
    for (std::size_t h = 0; h < series.hours.size(); ++h) {
        const HourOfDay& hour = series.hours.at(h);
        if (hour.presses == 0 && hour.active == estimator::Micros{0}) {
            continue;
        }
        table.add({fmt::format("{:02}:00", h), grouped(hour.presses), grouped(hour.clicks),
                   duration_text(hour.active), std::to_string(hour.throughput.values.size()),
                   mean_text(hour.throughput)});
    }
    return table.text();
}

std::string notes(const WeekSummary& week, WeekDetail detail, const Session& session) {
    const double percent = 100.0 * week.confidence;
    std::string text;
    if (detail == WeekDetail::by_direction) {
        text += wrapped(fmt::format(
            "Offset and angle are means over days (± half of the {} % interval); a day counts for "
            "a "
            "direction from {} scored clicks in it on. Positive is left of the straight line, "
            "as seen by the moving hand. With 16 intervals a pointer, one may well leave out zero "
            "by chance.",
            percent, k_min_sector_clicks));
    } else if (detail == WeekDetail::by_hour) {
        text += wrapped(
            fmt::format("Throughput is a mean over days (± half of the {} % interval); "
                        "a day counts for an hour from {} scored clicks in it on. Hours are "
                        "those of "
                        "{}.",
                        percent, k_min_day_clicks, session.calendar.zone_name()));
    } else {
        text += wrapped(fmt::format(
            "Each value is a mean over days ± half of its {} % interval, with days as the unit; "
            "before = the four weeks before; difference = this week less before. A difference "
            "is called higher or lower when its interval leaves out zero, which about one in "
            "{:.0f} "
            "does by chance alone.",
            percent, 1.0 / (1.0 - week.confidence)));
        text += flag_note(week);
    }
    if (detail != WeekDetail::by_direction) {
        text += wrapped(fmt::format("Implied throughput uses a reference target width W of {} px; "
                                    "the true width is unseen; not ISO throughput.",
                                    week.reference_width.value()));
    }
    for (const SeriesWeek& series : week.series) {
        if (series.pointer.cpi_source == estimator::CpiSource::assumed) {
            text += wrapped(fmt::format(
                "Hand travel of {} rests on an assumed CPI of {:.0f}; set cpi in the config.",
                pointer_title(series.pointer), series.pointer.cpi.value()));
        }
    }
    if (!session.calendar.remark().empty()) {
        text += wrapped(session.calendar.remark());
    }
    text += wrapped("Sagitta measures pointing and does not diagnose. Pain, numbness or weakness "
                    "are for a clinician, whatever these figures say.");
    return text;
}

} // namespace

std::string week_text(const WeekSummary& week, WeekDetail detail, const Session& session,
                      std::optional<UtcTime> last_hour) {
    if (week.empty()) {
        return empty_week(week, session, last_hour);
    }
    std::string text = opening(week, detail);
    if (week.any_simulated()) {
        text +=
            session.style.warning("SIMULATED DATA: made by the simulated hand, not by a person. "
                                  "Pointers marked so are invented.") +
            "\n";
    }
    if (detail == WeekDetail::summary) {
        text += "\n" + session.style.heading("Coverage and exposure") + "\n" + exposure_table(week);
        text += "\n" + session.style.heading("What became of runs of motion and presses") + "\n" +
                outcome_table(week);
    }
    for (const SeriesWeek& series : week.series) {
        text += "\n" + series_heading(series, session);
        switch (detail) {
        case WeekDetail::summary:
            text += days_sentence(series);
            text += series.days_counted + series.days_counted_before > 0
                        ? measure_table(series, week)
                        : "";
            text += change_lines(series, week);
            break;
        case WeekDetail::by_direction:
            text += direction_table(series);
            text += series.days_counted < k_min_days
                        ? under_heading(
                              fmt::format("Too few days for intervals, which need {}.", k_min_days))
                        : "";
            break;
        case WeekDetail::by_hour:
            text += hour_table(series);
            break;
        }
    }
    return text + "\n" + notes(week, detail, session);
}

} // namespace sagitta::report
