// Means with their uncertainty.
#pragma once

#include "estimator/result.hpp"

#include <span>

namespace sagitta::estimator {

struct Interval {
    double estimate;
    double low, high;
    double df;
};

/// Mean of independent values (one a day) with its t interval.
/// @param values  n >= 2, finite;  @param confidence  (0, 1), e.g. 0.95
/// @return ErrorCode::too_few below 2 values; ErrorCode::bad_value when the confidence or a value
///         is out of its range
[[nodiscard]] Result<Interval> mean_interval(std::span<const double> values, double confidence);

/// Difference of two means, mean(a) - mean(b), with Welch's interval and Satterthwaite's degrees
/// of freedom. Source: Welch (1947). When neither varies, its width is 0 and df that of the pooled
/// test.
/// @param a, b  each n >= 2
/// @return the errors of mean_interval
[[nodiscard]] Result<Interval> difference_interval(std::span<const double> a,
                                                   std::span<const double> b, double confidence);

} // namespace sagitta::estimator
