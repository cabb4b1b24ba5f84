#include "estimator/interval.hpp"

#include "estimator/moments.hpp"

#include <boost/math/distributions/students_t.hpp>
#include <cmath>
#include <string>

namespace sagitta::estimator {
namespace {

namespace policies = boost::math::policies;
// Errors become not-a-number instead of exceptions; the arguments are checked before.
using Quiet = policies::policy<policies::domain_error<policies::ignore_error>,
                               policies::pole_error<policies::ignore_error>,
                               policies::overflow_error<policies::ignore_error>,
                               policies::evaluation_error<policies::ignore_error>>;

Interval interval_of(double estimate, double se, double df, double confidence) {
    const boost::math::students_t_distribution<double, Quiet> student{df};
    const double t = boost::math::quantile(boost::math::complement(student, (1 - confidence) / 2));
    return {estimate, estimate - t * se, estimate + t * se, df};
}

Result<Moments> moments_of(std::span<const double> values, double confidence) {
    if (!(confidence > 0.0 && confidence < 1.0)) {
        return fail(ErrorCode::bad_value, "The confidence of an interval is " +
                                              std::to_string(confidence) +
                                              "; give a share between 0 and 1, such as 0.95.");
    }
    if (values.size() < 2) {
        return fail(ErrorCode::too_few, "A mean with an interval needs 2 values or more; got " +
                                            std::to_string(values.size()) +
                                            "; wait for another day.");
    }
    Moments moments;
    for (const double value : values) {
        moments.add(value);
    }
    if (!std::isfinite(moments.m2)) {
        return fail(ErrorCode::bad_value,
                    "A mean needs finite values, and one of these is not; leave it out.");
    }
    return moments;
}

} // namespace

Result<Interval> mean_interval(std::span<const double> values, double confidence) {
    const auto moments = moments_of(values, confidence);
    if (!moments) {
        return tl::unexpected<Error>{moments.error()};
    }
    const double n = static_cast<double>(moments->n);
    return interval_of(moments->mean, std::sqrt(moments->variance() / n), n - 1.0, confidence);
}

Result<Interval> difference_interval(std::span<const double> a, std::span<const double> b,
                                     double confidence) {
    const auto first = moments_of(a, confidence);
    if (!first) {
        return tl::unexpected<Error>{first.error()};
    }
    const auto second = moments_of(b, confidence);
    if (!second) {
        return tl::unexpected<Error>{second.error()};
    }
    const double free_a = static_cast<double>(first->n - 1);
    const double free_b = static_cast<double>(second->n - 1);
    const double var_a = first->variance() / static_cast<double>(first->n);
    const double var_b = second->variance() / static_cast<double>(second->n);
    const double variance = var_a + var_b;
    const double pooled_df = free_a + free_b; // where nothing varies, its degrees are moot
    const double df = variance > 0.0
                          ? variance * variance / (var_a * var_a / free_a + var_b * var_b / free_b)
                          : pooled_df;
    return interval_of(first->mean - second->mean, std::sqrt(variance), df, confidence);
}

} // namespace sagitta::estimator
