// Crossings of the task axis and changes of direction, counted with a dead band.
#pragma once

#include <cstdint>
#include <span>

namespace sagitta::estimator {

/// Task-axis crossings (TAC): the path passes from beyond half the band on one side of the axis to
/// beyond half the band on the other. With a band of 0: sign changes of y, zeros skipped.
/// Source: MacKenzie, Kauppinen & Silfverberg (2001).
/// @param y_px  signed perpendicular distances;  @param band_px  >= 0
[[nodiscard]] std::uint16_t axis_crossings(std::span<const double> y_px, double band_px) noexcept;

/// Turning points of a coordinate: after moving one way it moves back by more than the band. With
/// a band of 0: sign changes of its difference, zeros skipped. Of the distance across the axis
/// they are movement direction changes (MDC), along the axis orthogonal direction changes (ODC).
/// Source: MacKenzie, Kauppinen & Silfverberg (2001).
[[nodiscard]] std::uint16_t turning_points(std::span<const double> coordinate_px,
                                           double band_px) noexcept;

} // namespace sagitta::estimator
