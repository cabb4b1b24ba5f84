// Straight-line least squares.
#pragma once

#include "estimator/moments.hpp"
#include "estimator/result.hpp"

#include <span>

namespace sagitta::estimator {

struct Line {
    double intercept, slope;
    double intercept_se, slope_se;
    double residual_sd; ///< divisor n - 2
    double r;           ///< correlation
};

/// Ordinary least squares of y on x.
/// @param x, y  equal length n >= 3, finite, x not constant
/// @return ErrorCode::too_few below 3 points; ErrorCode::bad_value when x does not vary
[[nodiscard]] Result<Line> fit_line(std::span<const double> x, std::span<const double> y);
[[nodiscard]] Result<Line> fit_line(const PairMoments& moments);

} // namespace sagitta::estimator
