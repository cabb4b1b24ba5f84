#include "estimator/trend.hpp"

#include <algorithm>
#include <boost/math/distributions/normal.hpp>
#include <cmath>
#include <string>
#include <vector>

namespace sagitta::estimator {
namespace {

Result<void> check_values(std::span<const double> y) {
    if (y.size() < k_min_trend_points) {
        return fail(ErrorCode::too_few, "A trend needs " + std::to_string(k_min_trend_points) +
                                            " values or more; got " + std::to_string(y.size()) +
                                            "; widen the stretch of time.");
    }
    if (!std::all_of(y.begin(), y.end(), [](double value) { return std::isfinite(value); })) {
        return fail(ErrorCode::bad_value,
                    "A trend needs finite values; leave out those that are not.");
    }
    return {};
}

Result<void> check_places(std::span<const double> x, std::span<const double> y) {
    if (x.size() != y.size()) {
        return fail(ErrorCode::bad_value, "A trend needs one place for each value; got " +
                                              std::to_string(x.size()) + " places for " +
                                              std::to_string(y.size()) + " values.");
    }
    const auto not_after = [](double first, double second) { return !(first < second); };
    if (!std::isfinite(x.front()) || !std::isfinite(x.back()) ||
        std::adjacent_find(x.begin(), x.end(), not_after) != x.end()) {
        return fail(ErrorCode::bad_value,
                    "A trend needs finite places that strictly increase; sort them and join "
                    "values of the same place.");
    }
    return {};
}

/// Variance of Kendall's S when there is no trend.
double variance_of_s(std::span<const double> y) {
    const auto weight = [](double n) { return n * (n - 1.0) * (2.0 * n + 5.0); };
    double sum = weight(static_cast<double>(y.size()));
    std::vector<double> sorted{y.begin(), y.end()};
    std::sort(sorted.begin(), sorted.end());
    for (auto first = sorted.begin(); first != sorted.end();) {
        const auto last = std::upper_bound(first, sorted.end(), *first);
        sum -= weight(static_cast<double>(last - first));
        first = last;
    }
    return sum / 18.0;
}

double median(std::vector<double> values) {
    const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
    std::nth_element(values.begin(), middle, values.end());
    const double upper = *middle;
    if (values.size() % 2 == 1) {
        return upper;
    }
    return (*std::max_element(values.begin(), middle) + upper) / 2.0;
}

} // namespace

Result<TheilSenLine> theil_sen(std::span<const double> x, std::span<const double> y,
                               double confidence) {
    if (auto ok = check_values(y).and_then([&] { return check_places(x, y); }); !ok) {
        return tl::unexpected<Error>{ok.error()};
    }
    if (!(confidence > 0.0) || !(confidence < 1.0)) {
        return fail(ErrorCode::bad_value, "A confidence must lie between 0 and 1; got " +
                                              std::to_string(confidence) + ".");
    }
    std::vector<double> slopes;
    slopes.reserve(x.size() * (x.size() - 1) / 2);
    for (std::size_t i = 0; i < x.size(); ++i) {
        for (std::size_t j = i + 1; j < x.size(); ++j) {
            slopes.push_back((y[j] - y[i]) / (x[j] - x[i]));
        }
    }
    std::sort(slopes.begin(), slopes.end());
    const double quantile = boost::math::quantile(
        boost::math::complement(boost::math::normal{}, 0.5 * (1.0 - confidence)));
    const double spread = quantile * std::sqrt(variance_of_s(y));
    const double count = static_cast<double>(slopes.size());
    // Sen's ranks, counted from 0: (N - C) / 2 - 1 and (N + C) / 2.
    const double low = std::max(std::nearbyint((count - spread) / 2.0) - 1.0, 0.0);
    const double high = std::min(std::nearbyint((count + spread) / 2.0), count - 1.0);

    TheilSenLine line{};
    line.slope = median(slopes);
    line.low = slopes[static_cast<std::size_t>(low)];
    line.high = slopes[static_cast<std::size_t>(high)];
    line.intercept = median({y.begin(), y.end()}) - line.slope * median({x.begin(), x.end()});
    return line;
}

Result<MannKendallTest> mann_kendall(std::span<const double> y) {
    if (auto ok = check_values(y); !ok) {
        return tl::unexpected<Error>{ok.error()};
    }
    MannKendallTest test{};
    for (std::size_t i = 0; i < y.size(); ++i) {
        for (std::size_t j = i + 1; j < y.size(); ++j) {
            test.s += (y[j] > y[i] ? 1 : 0) - (y[j] < y[i] ? 1 : 0);
        }
    }
    test.variance = variance_of_s(y);
    test.p = 1.0;
    if (test.s != 0) {
        const double size = std::abs(static_cast<double>(test.s)) - 1.0;
        test.z = std::copysign(size / std::sqrt(test.variance), static_cast<double>(test.s));
        test.p = 2.0 *
                 boost::math::cdf(boost::math::complement(boost::math::normal{}, std::abs(test.z)));
    }
    return test;
}

} // namespace sagitta::estimator
