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
    double r;           ///< correlation; 0 when y does not vary
};

/// Ordinary least squares of y on x. Common practice, no source. From the points themselves the
/// residuals are summed one by one; from moments they are a difference of sums, which loses digits
/// as |r| nears 1 (NIST's Norris data, 1 - r^2 = 6e-6: still 9 digits).
/// @param x, y  equal length n >= 3, finite, x not constant
/// @return ErrorCode::too_few below 3 points; ErrorCode::bad_value when x does not vary or a value
/// is
///         not finite
[[nodiscard]] Result<Line> fit_line(std::span<const double> x, std::span<const double> y);
[[nodiscard]] Result<Line> fit_line(const PairMoments& moments);

} // namespace sagitta::estimator
