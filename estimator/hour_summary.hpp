// What is kept of an hour of pointing for ever: counts, exposure and mergeable statistics.
#pragma once

#include "estimator/log_histogram.hpp"
#include "estimator/moments.hpp"
#include "estimator/movement.hpp"

#include <array>

namespace sagitta::estimator {

/// Eight sectors of 45 deg; sector 0 is centred on 0 deg (right), then counter-clockwise.
constexpr std::size_t k_sectors = 8;
/// @param direction  [0, 360)
[[nodiscard]] std::size_t sector_of(Degrees direction) noexcept;

struct SectorSummary {
    Moments offset_share;      ///< MO / D, + = left of the task axis
    Moments initial_angle_deg; ///< + = left of the task axis
};

/// Mergeable summary of any set of outcomes; the store keeps one per hour, pointer and condition.
/// The statistics cover scored clicks; drags are only counted, by the outcome of their exposure.
/// In logarithms lengths below 0.1 px count as 0.1 px, and times below 1 us as 1 us.
struct HourSummary {
    OutcomeCounts outcomes{};
    std::uint64_t presses = 0;
    std::uint64_t wheel_120ths = 0;
    std::uint64_t motion_reports = 0;
    Micros active{};
    Millimetres hand_travel = Millimetres::zero();

    // Sums over scored clicks for implied throughput, at W/2, W and 2W.
    Pixels reference_width = Pixels::of(20.0);
    std::uint64_t clicks = 0;
    std::uint64_t clicks_cpi_assumed = 0;
    Micros movement_time{};
    std::array<double, 3> difficulty_bits{};

    PairMoments log_distance_time;  ///< ln px, ln s
    PairMoments log_distance_error; ///< ln px, ln px of ME
    Moments log_path_ratio;
    Moments direction_changes;
    Moments submovements;
    Moments peak_speed_mm_s;
    LogHistogram distance_px;
    LogHistogram movement_time_ms;
    LogHistogram error_centipx; ///< px / 100
    std::array<SectorSummary, k_sectors> sectors{};

    void add(const Movement& movement) noexcept;
    void add(const Exposure& exposure) noexcept;
    /// Precondition: equal reference widths.
    void merge(const HourSummary& other) noexcept;
};

} // namespace sagitta::estimator
