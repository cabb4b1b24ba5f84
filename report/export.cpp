#include "report/export.hpp"

#include <fmt/format.h>
#include <map>

namespace sagitta::report {
namespace {

using estimator::HourSummary;
using estimator::Micros;

double milliseconds(Micros duration) {
    return static_cast<double>(duration.count()) / 1000.0;
}

/// Names by id, looked up once.
struct Names {
    std::map<store::PointerId, std::string> pointers;
    std::map<store::ConditionId, std::string> conditions;

    template <class Id>
    static std::string_view find(const std::map<Id, std::string>& names, Id id) {
        const auto found = names.find(id);
        return found == names.end() ? std::string_view{} : std::string_view{found->second};
    }
};

Result<Names> read_names(const store::Store& store) {
    Names names;
    const auto pointers = store.pointers();
    if (!pointers) {
        return tl::unexpected{pointers.error()};
    }
    for (const store::StoredPointer& pointer : *pointers) {
        names.pointers.emplace(pointer.id, pointer.name);
    }
    const auto conditions = store.conditions();
    if (!conditions) {
        return tl::unexpected{conditions.error()};
    }
    for (const store::StoredCondition& condition : *conditions) {
        names.conditions.emplace(condition.id, condition.label);
    }
    return names;
}

void write_movement(RowWriter& rows, const store::StoredMovement& movement, const Names& names) {
    const estimator::Scores& scores = movement.scores;
    rows.time(movement.start);
    rows.time(movement.press);
    rows.text(Names::find(names.pointers, movement.pointer));
    rows.text(Names::find(names.conditions, movement.condition));
    rows.text(estimator::to_text(movement.kind));
    rows.text(estimator::to_text(movement.button));
    rows.number(scores.distance.value());
    rows.number(scores.direction.value());
    rows.number(milliseconds(scores.movement_time));
    rows.number(milliseconds(scores.dwell));
    rows.number(scores.path.value());
    rows.number(scores.path_ratio());
    rows.number(scores.error.value());
    rows.number(scores.offset.value());
    rows.number(scores.variability.value());
    rows.number(scores.max_deviation.value());
    rows.whole(scores.axis_crossings);
    rows.whole(scores.direction_changes);
    rows.whole(scores.orthogonal_changes);
    rows.number(scores.peak_speed.value());
    rows.number(milliseconds(scores.time_to_peak));
    rows.whole(scores.submovements);
    rows.number(scores.primary_fraction);
    rows.number(scores.primary_lateral.value());
    rows.number(scores.initial_angle.value());
    rows.number(scores.smoothness_sparc);
    rows.number(scores.smoothness_ldlj);
    rows.number(scores.hand_travel.value());
    rows.whole(scores.reports);
    rows.whole(scores.flags);
    rows.end_row();
}

void write_count(RowWriter& rows, std::uint64_t count) {
    rows.whole(static_cast<std::int64_t>(count));
}

/// A quantile, nothing when the histogram is empty.
void write_quantile(RowWriter& rows, const estimator::LogHistogram& histogram, double share,
                    double unit) {
    rows.number(histogram.count() > 0 ? histogram.quantile(share) * unit
                                      : std::numeric_limits<double>::quiet_NaN());
}

void write_moments(RowWriter& rows, const estimator::Moments& moments) {
    rows.number(moments.mean);
    rows.number(moments.m2);
}

void write_pair(RowWriter& rows, const estimator::PairMoments& pair) {
    rows.number(pair.mean_x);
    rows.number(pair.mean_y);
    rows.number(pair.m2_x);
    rows.number(pair.m2_y);
    rows.number(pair.m_xy);
}

void write_hour(RowWriter& rows, const store::StoredHour& hour, const Names& names) {
    const HourSummary& summary = hour.summary;
    rows.time(hour.start);
    rows.text(Names::find(names.pointers, hour.pointer));
    rows.text(Names::find(names.conditions, hour.condition));
    for (const std::uint64_t count : summary.outcomes) {
        write_count(rows, count);
    }
    write_count(rows, summary.presses);
    rows.number(static_cast<double>(summary.wheel_120ths) / 120.0);
    write_count(rows, summary.motion_reports);
    rows.number(milliseconds(summary.active));
    rows.number(summary.hand_travel.value());
    rows.number(summary.reference_width.value());
    write_count(rows, summary.clicks);
    write_count(rows, summary.clicks_cpi_assumed);
    rows.number(milliseconds(summary.movement_time));
    for (const double bits : summary.difficulty_bits) {
        rows.number(bits);
    }
    write_quantile(rows, summary.distance_px, 0.5, 1.0);
    write_quantile(rows, summary.movement_time_ms, 0.5, 1.0);
    write_quantile(rows, summary.error_centipx, 0.5, 0.01);
    write_pair(rows, summary.log_distance_time);
    write_pair(rows, summary.log_distance_error);
    write_moments(rows, summary.log_path_ratio);
    write_moments(rows, summary.direction_changes);
    write_moments(rows, summary.submovements);
    write_moments(rows, summary.peak_speed_mm_s);
    for (const estimator::SectorSummary& sector : summary.sectors) {
        write_count(rows, sector.offset_share.n);
        write_moments(rows, sector.offset_share);
        write_moments(rows, sector.initial_angle_deg);
    }
    rows.end_row();
}

Result<store::Selection> selection_of(const ExportRequest& request, const Session& session,
                                      const store::Store& store) {
    store::Selection selection;
    if (request.from) {
        const auto from = parse_time(*request.from, session.calendar);
        if (!from) {
            return tl::unexpected{from.error()};
        }
        selection.from = *from;
    }
    if (request.to) {
        const auto to = parse_time(*request.to, session.calendar);
        if (!to) {
            return tl::unexpected{to.error()};
        }
        selection.to = *to;
    }
    if (request.pointer) {
        const auto pointer = find_pointer(store, *request.pointer);
        if (!pointer) {
            return tl::unexpected{pointer.error()};
        }
        selection.pointer = *pointer;
    }
    return selection;
}

} // namespace

std::vector<std::string> movement_columns() {
    return {"start_utc",
            "press_utc",
            "pointer",
            "condition",
            "kind",
            "button",
            "distance_px",
            "direction_deg",
            "movement_time_ms",
            "dwell_ms",
            "path_px",
            "path_ratio",
            "error_px",
            "offset_px",
            "variability_px",
            "max_deviation_px",
            "axis_crossings",
            "direction_changes",
            "orthogonal_changes",
            "peak_speed_mm_s",
            "time_to_peak_ms",
            "submovements",
            "primary_fraction",
            "primary_lateral_px",
            "initial_angle_deg",
            "smoothness_sparc",
            "smoothness_ldlj",
            "hand_travel_mm",
            "reports",
            "flags"};
}

std::vector<std::string> hour_columns() {
    std::vector<std::string> columns = {"hour_utc", "pointer", "condition"};
    for (std::size_t o = 0; o < estimator::k_outcomes; ++o) {
        columns.emplace_back(estimator::to_text(static_cast<estimator::Outcome>(o)));
    }
    for (const char* name :
         {"presses", "wheel_detents", "motion_reports", "active_ms", "hand_travel_mm",
          "reference_width_px", "clicks", "clicks_cpi_assumed", "movement_time_ms",
          "difficulty_half_width_bits", "difficulty_bits", "difficulty_double_width_bits",
          "median_distance_px", "median_movement_time_ms", "median_error_px"}) {
        columns.emplace_back(name);
    }
    for (const std::string of : {"ln_px_ln_s", "ln_px_ln_error_px"}) {
        for (const char* part : {"mean_x", "mean_y", "m2_x", "m2_y", "m_xy"}) {
            columns.push_back(of + "_" + part);
        }
    }
    for (const std::string of :
         {"ln_path_ratio", "direction_changes", "submovements", "peak_speed_mm_s"}) {
        columns.push_back(of + "_mean");
        columns.push_back(of + "_m2");
    }
    for (std::size_t s = 0; s < estimator::k_sectors; ++s) {
        const std::string of = fmt::format("sector_{}_deg_", 45 * s);
        for (const char* part : {"clicks", "offset_share_mean", "offset_share_m2",
                                 "initial_angle_deg_mean", "initial_angle_deg_m2"}) {
            columns.push_back(of + part);
        }
    }
    return columns;
}

Result<Output> run_export(const ExportRequest& request, const Session& session, std::FILE* out) {
    const auto store = open_for_reading(session);
    if (!store) {
        return tl::unexpected{store.error()};
    }
    const auto selection = selection_of(request, session, *store);
    if (!selection) {
        return tl::unexpected{selection.error()};
    }
    const auto names = read_names(*store);
    if (!names) {
        return tl::unexpected{names.error()};
    }
    const bool hours = request.table == ExportTable::hours;
    RowWriter rows{request.format, hours ? hour_columns() : movement_columns(), out};
    const Result<void> read =
        hours ? store->for_each_hour(*selection,
                                     [&](const store::StoredHour& hour) {
                                         if (!rows.reader_gone()) {
                                             write_hour(rows, hour, *names);
                                         }
                                     })
              : store->for_each_movement(*selection, [&](const store::StoredMovement& movement) {
                    if (!rows.reader_gone()) {
                        write_movement(rows, movement, *names);
                    }
                });
    const auto finished = rows.finish();
    if (!read) {
        return tl::unexpected{read.error()};
    }
    if (!finished) {
        return tl::unexpected{finished.error()};
    }
    return Output{};
}

} // namespace sagitta::report
