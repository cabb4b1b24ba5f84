#include "estimator/regression.hpp"

#include <algorithm>
#include <cmath>
#include <string>

namespace sagitta::estimator {
namespace {

Result<void> check(const PairMoments& moments) {
    if (moments.n < 3) {
        return fail(ErrorCode::too_few, "A straight line needs 3 points or more; got " +
                                            std::to_string(moments.n) +
                                            "; widen the stretch of time.");
    }
    if (!(moments.m2_x > 0.0) || !std::isfinite(moments.m2_x) || !std::isfinite(moments.m2_y)) {
        return fail(ErrorCode::bad_value,
                    "A straight line needs finite points at different places along x, and these "
                    "have no spread or a value that is not a number; take more varied ones.");
    }
    return {};
}

Line line_of(const PairMoments& moments, double slope, double residual_squares) {
    const double n = static_cast<double>(moments.n);
    const double variance = residual_squares / (n - 2.0);
    const double spread = std::sqrt(moments.m2_x * moments.m2_y);
    Line line{};
    line.slope = slope;
    line.intercept = moments.mean_y - slope * moments.mean_x;
    line.slope_se = std::sqrt(variance / moments.m2_x);
    line.intercept_se =
        std::sqrt(variance * (1.0 / n + moments.mean_x * moments.mean_x / moments.m2_x));
    line.residual_sd = std::sqrt(variance);
    line.r = spread > 0.0 ? std::clamp(moments.m_xy / spread, -1.0, 1.0) : 0.0;
    return line;
}

} // namespace

Result<Line> fit_line(std::span<const double> x, std::span<const double> y) {
    PairMoments moments;
    for (std::size_t i = 0; i < x.size(); ++i) {
        moments.add(x[i], y[i]);
    }
    if (auto ok = check(moments); !ok) {
        return tl::unexpected<Error>{ok.error()};
    }
    // A second pass: the residuals themselves keep digits that a difference of sums would lose.
    const double slope = moments.m_xy / moments.m2_x;
    double squares = 0.0;
    for (std::size_t i = 0; i < x.size(); ++i) {
        const double residual = (y[i] - moments.mean_y) - slope * (x[i] - moments.mean_x);
        squares += residual * residual;
    }
    return line_of(moments, slope, squares);
}

Result<Line> fit_line(const PairMoments& moments) {
    if (auto ok = check(moments); !ok) {
        return tl::unexpected<Error>{ok.error()};
    }
    const double slope = moments.m_xy / moments.m2_x;
    return line_of(moments, slope, std::max(moments.m2_y - slope * moments.m_xy, 0.0));
}

} // namespace sagitta::estimator
