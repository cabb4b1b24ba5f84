// How far a path strays from its task axis.
#pragma once

#include "estimator/units.hpp"

#include <span>

namespace sagitta::estimator {

/// Measures over the perpendicular distances y_1..y_n of a path's samples, equally spaced in time.
struct Deviation {
    Pixels error;         ///< ME = sum |y_i| / n
    Pixels offset;        ///< MO = sum y_i / n
    Pixels variability;   ///< MV = sqrt(sum (y_i - MO)^2 / (n - 1))
    Pixels max_deviation; ///< max |y_i|
};

/// Source: MacKenzie, Kauppinen & Silfverberg (2001), CHI, pp. 9-16.
/// @param y_px  n >= 2, + = left of the axis
[[nodiscard]] Deviation deviation(std::span<const double> y_px) noexcept;

} // namespace sagitta::estimator
