// The pieces of a movement's speed profile.
#pragma once

#include <cstddef>
#include <cstdint>
#include <span>

namespace sagitta::estimator {

struct Submovements {
    std::uint16_t count;     ///< >= 1 for any moving path
    double primary_end;      ///< where the primary submovement ends, in samples, interpolated
};

/// Splits a movement by the published end criteria. After the first peak, the primary submovement
/// ends at the first of (1) the velocity along the axis turning from + to - (reversal), (2) the
/// acceleration turning from - to + (a new speed-up), (3) the jerk turning from + to - while
/// decelerating (an inflection). A piece counts when its speed peak, or its inflection, stands out
/// by 5 % of the peak speed.
/// Source: Meyer et al. (1988); Walker, Meyer & Smelcer (1993); Walker, Philbin & Fisk (1997).
/// @param along_velocity  velocity along the task axis, any unit, n >= 3, equally spaced
/// @param interval_s      spacing of the samples, s, > 0
[[nodiscard]] Submovements find_submovements(std::span<const double> along_velocity,
                                             double interval_s) noexcept;

} // namespace sagitta::estimator
