// A control chart on an exponentially weighted moving average (EWMA): tells when one value a day
// has left what a baseline leads one to expect.
#pragma once

#include "estimator/result.hpp"

#include <cstddef>
#include <optional>
#include <span>

namespace sagitta::estimator {

/// What the values are like when nothing has changed.
struct EwmaBaseline {
    double mean;
    double sd;          ///< > 0
    std::size_t values; ///< how many these two were estimated from, >= 2; 0: they are known
};

/// Mean and standard deviation of values from before the chart begins.
/// @return ErrorCode::too_few below EwmaChart::k_min_baseline values; ErrorCode::bad_value when one
///         is not finite or they do not vary
[[nodiscard]] Result<EwmaBaseline> ewma_baseline(std::span<const double> values);

/// How much the newest value weighs, and how wide the limits are.
struct EwmaRules {
    double weight = 0.2; ///< lambda, (0, 1]
    double width = 3.0;  ///< L, > 0, in standard deviations of the statistic
};

/// Days between false signals of the default rules when the baseline is known, nothing changes and
/// the chart is never restarted: the average run length in control, with limits exact from the
/// first day. Source: computed with the R package spc (xewma.arl), lambda 0.2, L 3, exact limits:
/// 554.487539; the same program agrees with published tables of run lengths.
constexpr double k_ewma_days_between_false_signals = 554.487539;

enum class EwmaSignal { none, above, below };

struct EwmaPoint {
    double statistic;
    double lower, upper;
    EwmaSignal signal; ///< whether the statistic lies outside its limits
};

/// The chart: z(t) = lambda y(t) + (1 - lambda) z(t - 1), z(0) = the baseline's mean, with limits
/// mean -+ L sd sqrt(lambda / (2 - lambda) (1 - (1 - lambda)^2t)), which are narrow at first and
/// settle. Source: NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.4; Lucas & Saccucci
/// (1990).
///
/// An estimated baseline of n values errs itself, and with the limits above a chart would cry wolf
/// more often than it was set for. So its error is counted in: a(t)^2 / n, a(t) = 1 - (1 -
/// lambda)^t, is added to the variance, and L becomes the quantile of Student's t with n - 1
/// degrees of freedom that is as rare as L is for a normal value. Each single day is then as
/// seldom falsely signalled as with a known baseline, given independent normal values; days that
/// go together with their neighbours raise false signals all the same.
class EwmaChart {
public:
    static constexpr std::size_t k_min_baseline = 10;

    /// @return ErrorCode::bad_value when a baseline or rule is out of its range
    [[nodiscard]] static Result<EwmaChart> start(const EwmaBaseline& baseline,
                                                 const EwmaRules& rules = {});
    /// The next value's point. @param value  finite
    EwmaPoint add(double value) noexcept;

private:
    EwmaChart(const EwmaBaseline& baseline, const EwmaRules& rules, double width);

    EwmaBaseline m_baseline;
    double m_weight;
    double m_width;       ///< L, or the quantile that stands for it
    double m_statistic;   ///< z
    double m_faded = 1.0; ///< (1 - lambda)^t
};

} // namespace sagitta::estimator
