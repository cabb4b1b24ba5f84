#include "report/replay_summary.hpp"

#include "estimator/throughput.hpp"
#include "report/numbers.hpp"
#include "report/table.hpp"

#include <cmath>
#include <fmt/format.h>
#include <nlohmann/json.hpp>

namespace sagitta::report {
namespace {

using Json = nlohmann::ordered_json;
using estimator::HourSummary;
using estimator::Outcome;

std::uint64_t count(const HourSummary& totals, Outcome outcome) {
    return totals.outcomes.at(static_cast<std::size_t>(outcome));
}

std::optional<double> throughput(const HourSummary& totals, std::size_t width) {
    const auto bits = estimator::Bits::of(totals.difficulty_bits.at(width));
    const auto result = estimator::implied_throughput(bits, totals.movement_time);
    return result ? std::optional{result->value()} : std::nullopt;
}

/// One figure of the set of scored clicks.
struct Figure {
    std::string name;      ///< for people
    const char* json_name; ///< with its unit
    const char* unit;
    double value;
};

std::vector<Figure> figures(const HourSummary& totals) {
    std::vector<Figure> list;
    if (totals.clicks == 0) {
        return list;
    }
    constexpr std::array<double, 3> k_width_shares = {0.5, 1.0, 2.0};
    constexpr std::array<const char*, 3> k_width_names = {
        "implied_throughput_half_width_bit_per_s", "implied_throughput_bit_per_s",
        "implied_throughput_double_width_bit_per_s"};
    for (const std::size_t i : {1U, 0U, 2U}) {
        if (const auto value = throughput(totals, i)) {
            const double width = totals.reference_width.value() * k_width_shares.at(i);
            list.push_back(
                {fmt::format("{}, W {} px", i == 1 ? "implied throughput" : "  the same", width),
                 k_width_names.at(i), "bit/s", *value});
        }
    }
    list.push_back(
        {"distance, median", "median_distance_px", "px", totals.distance_px.quantile(0.5)});
    list.push_back({"movement time, median", "median_movement_time_ms", "ms",
                    totals.movement_time_ms.quantile(0.5)});
    list.push_back({"movement error, median", "median_error_px", "px",
                    totals.error_centipx.quantile(0.5) / 100.0});
    list.push_back(
        {"path ratio, geometric mean", "path_ratio", "", std::exp(totals.log_path_ratio.mean)});
    list.push_back({"direction changes per movement, mean", "direction_changes", "",
                    totals.direction_changes.mean});
    list.push_back(
        {"submovements per movement, mean", "submovements", "", totals.submovements.mean});
    list.push_back({"peak speed, mean", "peak_speed_mm_s", "mm/s", totals.peak_speed_mm_s.mean});
    return list;
}

std::string opening(const ReplaySummary& summary, const HourSummary& totals) {
    const std::uint64_t clicks = count(totals, Outcome::scored_click);
    const std::uint64_t drags = count(totals, Outcome::scored_drag);
    const std::string into = summary.store_file.empty()
                                 ? "; nothing was stored, since no --store was given"
                                 : ", stored in " + summary.store_file;
    return wrapped(fmt::format(
        "{} held {} and {}; {} were scored ({}, {}){}.",
        count_of(summary.recordings.size(), "recording"), count_of(summary.reports(), "report"),
        count_of(totals.presses, "button press"), count_of(clicks + drags, "movement"),
        count_of(clicks, "click"), count_of(drags, "drag"), into));
}

std::string recordings_table(const ReplaySummary& summary) {
    Table table{{{"recording", Align::left},
                 {"format", Align::left},
                 {"pointer", Align::left},
                 {"reports", Align::right},
                 {"presses", Align::right},
                 {"scored", Align::right}}};
    for (const ReplayedRecording& one : summary.recordings) {
        std::string pointers;
        for (const std::string& name : one.pointers) {
            pointers += (pointers.empty() ? "" : ", ") + printable(name);
        }
        const auto name = std::filesystem::path{one.file}.filename().string();
        table.add({shortened(printable(name), 28), one.format, shortened(pointers, 26),
                   grouped(one.reports), grouped(one.totals.presses),
                   grouped(count(one.totals, Outcome::scored_click) +
                           count(one.totals, Outcome::scored_drag))});
    }
    return table.text();
}

std::string outcome_table(const HourSummary& totals) {
    Table table{{{"", Align::left}, {"count", Align::right}, {"share", Align::right}}};
    std::uint64_t all = 0;
    for (const std::uint64_t one : totals.outcomes) {
        all += one;
    }
    for (std::size_t o = 0; o < totals.outcomes.size(); ++o) {
        if (totals.outcomes.at(o) > 0) {
            table.add({std::string{explain(static_cast<Outcome>(o))},
                       grouped(totals.outcomes.at(o)), share(totals.outcomes.at(o), all)});
        }
    }
    return table.text();
}

Json totals_json(const HourSummary& totals) {
    Json json = {{"presses", totals.presses},
                 {"motion_reports", totals.motion_reports},
                 {"scored_movements",
                  count(totals, Outcome::scored_click) + count(totals, Outcome::scored_drag)},
                 {"wheel_detents", static_cast<double>(totals.wheel_120ths) / 120.0},
                 {"active_s", estimator::seconds(totals.active)},
                 {"hand_travel_mm", totals.hand_travel.value()},
                 {"reference_width_px", totals.reference_width.value()}};
    for (std::size_t o = 0; o < totals.outcomes.size(); ++o) {
        json["outcomes"][std::string{to_text(static_cast<Outcome>(o))}] = totals.outcomes.at(o);
    }
    json["scored_clicks"] = Json::object();
    for (const Figure& figure : figures(totals)) {
        json["scored_clicks"][figure.json_name] = figure.value;
    }
    return json;
}

} // namespace

std::uint64_t ReplaySummary::reports() const {
    std::uint64_t sum = 0;
    for (const ReplayedRecording& one : recordings) {
        sum += one.reports;
    }
    return sum;
}

HourSummary ReplaySummary::totals() const {
    HourSummary sum;
    for (const ReplayedRecording& one : recordings) {
        if (&one == &recordings.front()) {
            sum = one.totals;
        } else {
            sum.merge(one.totals);
        }
    }
    return sum;
}

std::string replay_text(const ReplaySummary& summary, const Session& session) {
    const HourSummary totals = summary.totals();
    std::string text = opening(summary, totals) + "\n" + recordings_table(summary);
    const std::string outcomes = outcome_table(totals);
    if (!outcomes.empty()) {
        text += "\n" + session.style.heading("What became of runs of motion and presses") + "\n" +
                outcomes;
    }
    Table table{{{"", Align::left}, {"", Align::right}, {"", Align::left}}};
    for (const Figure& figure : figures(totals)) {
        table.add({figure.name, plain(figure.value), figure.unit});
    }
    if (!table.empty()) {
        text += "\n" + session.style.heading("The scored clicks") + "\n" + table.text();
    }
    std::string remarks;
    for (const ReplayedRecording& one : summary.recordings) {
        for (const std::string& remark : one.remarks) {
            remarks += wrapped(printable(one.file + ": " + remark));
        }
    }
    if (!remarks.empty()) {
        text += "\n" + session.style.heading("Remarks") + "\n" + remarks;
    }
    if (totals.clicks > 0) {
        text += "\n" + wrapped(fmt::format("Implied throughput uses a reference target width W of "
                                           "{} px; the true width is unseen; not ISO throughput.",
                                           totals.reference_width.value()));
    }
    if (summary.cpi_assumed) {
        text += wrapped("Lengths and speeds in mm rest on an assumed CPI of 1000; give the "
                        "pointer's own with --cpi.");
    }
    return text;
}

std::string replay_json(const ReplaySummary& summary) {
    Json json = {{"reports", summary.reports()},
                 {"store", summary.store_file.empty() ? Json(nullptr) : Json(summary.store_file)},
                 {"cpi_assumed", summary.cpi_assumed}};
    json.update(totals_json(summary.totals()));
    json["recordings"] = Json::array();
    for (const ReplayedRecording& one : summary.recordings) {
        Json entry = {{"file", one.file},
                      {"format", one.format},
                      {"pointers", one.pointers},
                      {"start_utc", one.start ? Json(to_iso(*one.start)) : Json(nullptr)},
                      {"reports", one.reports},
                      {"remarks", one.remarks}};
        entry.update(totals_json(one.totals));
        json["recordings"].push_back(std::move(entry));
    }
    json["note"] = "implied throughput uses a reference target width; the true width is unseen; "
                   "not ISO throughput";
    return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

} // namespace sagitta::report
