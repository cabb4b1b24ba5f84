// The pieces of a movement's speed profile.
#pragma once

#include <cstdint>
#include <span>

namespace sagitta::estimator {

struct Submovements {
    std::uint16_t count; ///< >= 1
    /// Where the primary submovement ends, in samples from the first, interpolated; the last sample
    /// when nothing follows it.
    double primary_end;
};

/// Splits a movement by the published end criteria. After the first peak of velocity towards the
/// press, the primary submovement ends at the first of
/// (1) the velocity turning from + to - (a reversal),
/// (2) the acceleration turning from - to + (a new speed-up),
/// (3) the jerk turning from + to - while decelerating (an inflection).
/// Source: Meyer et al. (1988); Walker, Meyer & Smelcer (1993); Walker, Philbin & Fisk (1997).
///
/// Taken literally the criteria count noise: the jerk of a smoothed path changes sign about every
/// 50 ms. So a turn counts only when what follows stands out by 5 % of the peak of |velocity|:
/// (1), (2)  |velocity| falls by that much from a peak and rises by that much from the lowest point
///           after it;
/// (3)       while |velocity| falls, the deceleration eases and grows again; with the steady
///           deceleration of the shallower of the two flanks taken out, |velocity| rises by that
///           much, and from there it still falls by that much. As the shallower flank tends to 0
///           this becomes (2), so there is no step between a shoulder and a second peak. Two
///           inflections count as two when each stands out so above what parts them.
/// Each such turn, before or after the primary submovement's end, starts a piece; `count` is the
/// number of pieces. Smaller turns, and inflections while speeding up, are not counted.
/// Allocates nothing.
/// @param along_velocity  velocity along the task axis, + = towards the press, any unit, n >= 3,
///                        equally spaced
/// @param least_prominence  >= 0, the same unit: what stands out by less is not counted either
[[nodiscard]] Submovements find_submovements(std::span<const double> along_velocity,
                                             double least_prominence = 0.0) noexcept;

} // namespace sagitta::estimator
