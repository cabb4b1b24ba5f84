// Index of difficulty and throughput.
#pragma once

#include "estimator/result.hpp"
#include "estimator/units.hpp"

#include <array>
#include <span>

namespace sagitta::estimator {

/// Forms of the index of difficulty, bits, of distance D and width W in one length unit.
enum class DifficultyForm { fitts, welford, shannon };

/// Fitts (1954): log2(2D/W). Welford (1968): log2(D/W + 0.5). Shannon form (MacKenzie 1989, used
/// by ISO 9241-411): log2(D/W + 1).
/// @param distance_in_widths  D/W, > 0
[[nodiscard]] Bits index_of_difficulty(DifficultyForm form, double distance_in_widths) noexcept;

/// Implied throughput of a set of movements: sum of log2(D/W + 1) over sum of MT. It is not ISO
/// throughput: W is a reference, the true width is unseen.
/// @return ErrorCode::too_few when the movement time is not positive
[[nodiscard]] Result<BitsPerSecond> implied_throughput(Bits difficulty, Micros movement_time);

/// One trial with a known target, in one length unit; used with known targets only.
struct TargetTrial {
    double from_x, from_y; ///< where the movement began
    double to_x, to_y;     ///< target centre
    double pressed_x, pressed_y;
    double movement_time_s;
};

struct EffectiveThroughput {
    double effective_distance; ///< Ae, the trials' length unit
    double spread;             ///< SD of the selection along the task axis, divisor n - 1
    double effective_width;    ///< We = 4.133 SD
    Bits difficulty;           ///< log2(Ae/We + 1)
    double mean_movement_time_s;
    BitsPerSecond throughput;
};

/// Effective throughput of one sequence of trials with known targets.
/// Source: ISO 9241-411:2012; Soukoreff & MacKenzie (2004).
/// @param trials  >= 2, with from != to
/// @return ErrorCode::too_few below 2 trials; ErrorCode::bad_value when a trial has no task
///         axis, the endpoints do not vary, or the mean distance or time is not positive
[[nodiscard]] Result<EffectiveThroughput> effective_throughput(std::span<const TargetTrial> trials);

} // namespace sagitta::estimator
