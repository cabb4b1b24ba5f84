#include "estimator/hour_summary.hpp"

#include <algorithm>
#include <cmath>

namespace sagitta::estimator {
namespace {

constexpr double k_sector_width_deg = 360.0 / static_cast<double>(k_sectors);
constexpr double k_smallest_logged_px = 0.1;
constexpr double k_smallest_logged_s = 1e-6; // the resolution of the stamps

double log_length(Pixels length) {
    return std::log(std::max(length.value(), k_smallest_logged_px));
}

double log_time(Micros time) {
    return std::log(std::max(seconds(time), k_smallest_logged_s));
}

template <class T, std::size_t Size>
void add_each(std::array<T, Size>& to, const std::array<T, Size>& from) {
    for (std::size_t index = 0; index < Size; ++index) {
        to[index] += from[index];
    }
}

} // namespace

std::size_t sector_of(Degrees direction) noexcept {
    const double turned = direction.value() + k_sector_width_deg / 2.0;
    return static_cast<std::size_t>(turned / k_sector_width_deg) % k_sectors;
}

void HourSummary::add(const Movement& movement) noexcept {
    if (movement.kind != MovementKind::click) {
        return;
    }
    const Scores& scores = movement.scores;
    ++clicks;
    if ((scores.flags & static_cast<FlagSet>(Flag::cpi_assumed)) != 0) {
        ++clicks_cpi_assumed;
    }
    movement_time += scores.movement_time;
    const double distance_in_widths = scores.distance / reference_width;
    difficulty_bits[0] += std::log2(distance_in_widths * 2.0 + 1.0);
    difficulty_bits[1] += std::log2(distance_in_widths + 1.0);
    difficulty_bits[2] += std::log2(distance_in_widths / 2.0 + 1.0);

    const double log_distance = log_length(scores.distance);
    log_distance_time.add(log_distance, log_time(scores.movement_time));
    log_distance_error.add(log_distance, log_length(scores.error));
    log_path_ratio.add(log_length(scores.path) - log_distance);
    direction_changes.add(static_cast<double>(scores.direction_changes));
    submovements.add(static_cast<double>(scores.submovements));
    peak_speed_mm_s.add(scores.peak_speed.value());
    distance_px.add(scores.distance.value());
    movement_time_ms.add(seconds(scores.movement_time) * 1e3);
    error_centipx.add(scores.error.value() * 100.0);

    SectorSummary& sector = sectors[sector_of(scores.direction)];
    sector.offset_share.add(scores.offset / scores.distance);
    sector.initial_angle_deg.add(scores.initial_angle.value());
}

void HourSummary::add(const Exposure& exposure) noexcept {
    ++outcomes[static_cast<std::size_t>(exposure.outcome)];
    motion_reports += exposure.reports;
    active += exposure.active;
    hand_travel += exposure.hand_travel;
}

void HourSummary::merge(const HourSummary& other) noexcept {
    add_each(outcomes, other.outcomes);
    presses += other.presses;
    wheel_120ths += other.wheel_120ths;
    motion_reports += other.motion_reports;
    active += other.active;
    hand_travel += other.hand_travel;

    clicks += other.clicks;
    clicks_cpi_assumed += other.clicks_cpi_assumed;
    movement_time += other.movement_time;
    add_each(difficulty_bits, other.difficulty_bits);

    log_distance_time.merge(other.log_distance_time);
    log_distance_error.merge(other.log_distance_error);
    log_path_ratio.merge(other.log_path_ratio);
    direction_changes.merge(other.direction_changes);
    submovements.merge(other.submovements);
    peak_speed_mm_s.merge(other.peak_speed_mm_s);
    distance_px.merge(other.distance_px);
    movement_time_ms.merge(other.movement_time_ms);
    error_centipx.merge(other.error_centipx);
    for (std::size_t sector = 0; sector < k_sectors; ++sector) {
        sectors[sector].offset_share.merge(other.sectors[sector].offset_share);
        sectors[sector].initial_angle_deg.merge(other.sectors[sector].initial_angle_deg);
    }
}

} // namespace sagitta::estimator
