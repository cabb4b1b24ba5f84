#include "estimator/throughput.hpp"

#include "estimator/moments.hpp"

#include <cmath>
#include <string>

namespace sagitta::estimator {
namespace {

/// Widths a standard deviation: sqrt(2 pi e), rounded as the standard prints it.
constexpr double k_effective_width_factor = 4.133;

} // namespace

Bits index_of_difficulty(DifficultyForm form, double distance_in_widths) noexcept {
    switch (form) {
    case DifficultyForm::fitts:
        return Bits::of(std::log2(2.0 * distance_in_widths));
    case DifficultyForm::welford:
        return Bits::of(std::log2(distance_in_widths + 0.5));
    case DifficultyForm::shannon:
        break;
    }
    return Bits::of(std::log2(distance_in_widths + 1.0));
}

Result<BitsPerSecond> implied_throughput(Bits difficulty, Micros movement_time) {
    if (movement_time <= Micros::zero()) {
        return fail(ErrorCode::too_few,
                    "Implied throughput needs scored movements, and there are none; widen the "
                    "stretch of time.");
    }
    return BitsPerSecond::of(difficulty.value() / seconds(movement_time));
}

Result<EffectiveThroughput> effective_throughput(std::span<const TargetTrial> trials) {
    if (trials.size() < 2) {
        return fail(ErrorCode::too_few, "Effective throughput needs 2 trials or more; got " +
                                            std::to_string(trials.size()) +
                                            "; check the trials' file.");
    }
    Moments distance;
    Moments along; // the selection's place beyond the target's centre
    Moments movement_time;
    for (const TargetTrial& trial : trials) {
        const double axis_x = trial.to_x - trial.from_x;
        const double axis_y = trial.to_y - trial.from_y;
        const double length = std::hypot(axis_x, axis_y);
        if (!(length > 0.0)) {
            return fail(
                ErrorCode::bad_value,
                "Trial " + std::to_string(movement_time.n + 1) +
                    " starts at its target's centre, so it has no task axis; leave it out.");
        }
        const double beyond =
            ((trial.pressed_x - trial.to_x) * axis_x + (trial.pressed_y - trial.to_y) * axis_y) /
            length;
        distance.add(length + beyond);
        along.add(beyond);
        movement_time.add(trial.movement_time_s);
    }
    const double spread = std::sqrt(along.variance());
    if (!(spread > 0.0) || !(distance.mean > 0.0) || !(movement_time.mean > 0.0)) {
        return fail(ErrorCode::bad_value,
                    "Effective throughput needs endpoints that vary along the task axis, and a "
                    "mean distance and movement time above 0; check the trials' columns.");
    }
    const double width = k_effective_width_factor * spread;
    const Bits difficulty = index_of_difficulty(DifficultyForm::shannon, distance.mean / width);
    return EffectiveThroughput{distance.mean,
                               spread,
                               width,
                               difficulty,
                               movement_time.mean,
                               BitsPerSecond::of(difficulty.value() / movement_time.mean)};
}

} // namespace sagitta::estimator
