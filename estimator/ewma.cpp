#include "estimator/ewma.hpp"

#include "estimator/moments.hpp"

#include <boost/math/distributions/normal.hpp>
#include <boost/math/distributions/students_t.hpp>
#include <cmath>
#include <string>

namespace sagitta::estimator {
namespace {

/// The half width in standard deviations that is as rare under Student's t as `width` is under the
/// normal distribution.
double student_width(double width, std::size_t values) {
    const double tail = boost::math::cdf(boost::math::complement(boost::math::normal{}, width));
    const boost::math::students_t student{static_cast<double>(values - 1)};
    return boost::math::quantile(boost::math::complement(student, tail));
}

} // namespace

Result<EwmaBaseline> ewma_baseline(std::span<const double> values) {
    if (values.size() < EwmaChart::k_min_baseline) {
        return fail(ErrorCode::too_few,
                    "A chart's baseline needs " + std::to_string(EwmaChart::k_min_baseline) +
                        " values or more; got " + std::to_string(values.size()) +
                        "; wait for more days.");
    }
    Moments moments;
    for (const double value : values) {
        moments.add(value);
    }
    if (!std::isfinite(moments.m2) || !(moments.m2 > 0.0)) {
        return fail(ErrorCode::bad_value, "A chart's baseline needs finite values that vary, or "
                                          "nothing can be unusual beside them.");
    }
    return EwmaBaseline{moments.mean, std::sqrt(moments.variance()), values.size()};
}

Result<EwmaChart> EwmaChart::start(const EwmaBaseline& baseline, const EwmaRules& rules) {
    if (!std::isfinite(baseline.mean) || !std::isfinite(baseline.sd) || !(baseline.sd > 0.0) ||
        baseline.values == 1) {
        return fail(ErrorCode::bad_value,
                    "A chart needs a finite baseline mean and a standard deviation above 0, from "
                    "2 values or more.");
    }
    // Beyond 8 standard deviations the tail has too few digits to be turned into a quantile.
    if (!(rules.weight > 0.0) || !(rules.weight <= 1.0) || !(rules.width > 0.0) ||
        !(rules.width <= 8.0)) {
        return fail(ErrorCode::bad_value,
                    "A chart's weight must lie in (0, 1] and its width in (0, 8]; got weight " +
                        std::to_string(rules.weight) + " and width " + std::to_string(rules.width) +
                        ".");
    }
    const double width =
        baseline.values == 0 ? rules.width : student_width(rules.width, baseline.values);
    return EwmaChart{baseline, rules, width};
}

EwmaChart::EwmaChart(const EwmaBaseline& baseline, const EwmaRules& rules, double width)
    : m_baseline{baseline}, m_weight{rules.weight}, m_width{width}, m_statistic{baseline.mean} {}

EwmaPoint EwmaChart::add(double value) noexcept {
    m_statistic = m_weight * value + (1.0 - m_weight) * m_statistic;
    m_faded *= 1.0 - m_weight;
    double variance = m_weight / (2.0 - m_weight) * (1.0 - m_faded * m_faded);
    if (m_baseline.values > 0) {
        const double share = 1.0 - m_faded;
        variance += share * share / static_cast<double>(m_baseline.values);
    }
    const double half = m_width * m_baseline.sd * std::sqrt(variance);
    EwmaPoint point{m_statistic, m_baseline.mean - half, m_baseline.mean + half, EwmaSignal::none};
    if (point.statistic > point.upper) {
        point.signal = EwmaSignal::above;
    } else if (point.statistic < point.lower) {
        point.signal = EwmaSignal::below;
    }
    return point;
}

} // namespace sagitta::estimator
