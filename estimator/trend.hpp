// A trend that a few odd days do not bend: the median of all slopes between two points, and a rank
// test of whether there is a trend at all.
#pragma once

#include "estimator/result.hpp"

#include <cstdint>
#include <span>

namespace sagitta::estimator {

struct TheilSenLine {
    double slope; ///< y per x
    double low, high;
    double intercept; ///< median of y - slope * median of x
};

struct MannKendallTest {
    std::int64_t s;  ///< pairs that rise less pairs that fall
    double variance; ///< of s when there is no trend, with ties of y counted
    double z;        ///< (|s| - 1) / sqrt(variance), with the sign of s; 0 when s is 0
    double p;        ///< two-sided, by the normal distribution
};

/// Below this the normal distribution, on which interval and p rest, is not good enough.
/// Source: common practice, no source.
constexpr std::size_t k_min_trend_points = 10;

/// Sources: Theil (1950); Sen (1968), whose interval, with the variance corrected for ties of y,
/// this is.
/// @param x  strictly increasing, finite;  @param y  finite, as many as x
/// @param confidence  (0, 1)
/// @return ErrorCode::too_few below k_min_trend_points; ErrorCode::bad_value otherwise
[[nodiscard]] Result<TheilSenLine> theil_sen(std::span<const double> x, std::span<const double> y,
                                             double confidence);

/// Sources: Mann (1945); Kendall (1975), with his correction for ties and for continuity.
/// @param y  in the order of time, finite
/// @return ErrorCode::too_few below k_min_trend_points; ErrorCode::bad_value when one is not finite
[[nodiscard]] Result<MannKendallTest> mann_kendall(std::span<const double> y);

} // namespace sagitta::estimator
