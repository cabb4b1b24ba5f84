#include "estimator/gain.hpp"

#include <algorithm>
#include <cmath>
#include <string>

namespace sagitta::estimator {

Result<Gain> Gain::flat(double factor) {
    return table({GainPoint{MillimetresPerSecond::zero(), factor}});
}

Result<Gain> Gain::table(std::vector<GainPoint> points) {
    if (points.empty()) {
        return fail(ErrorCode::bad_value, "a gain table needs at least one point");
    }
    for (std::size_t i = 0; i < points.size(); ++i) {
        const std::string where = "gain point " + std::to_string(i + 1);
        const double speed = points[i].speed.value();
        if (!std::isfinite(speed) || speed < 0.0) {
            return fail(ErrorCode::bad_value, where + ": the speed must be 0 mm/s or more");
        }
        if (!std::isfinite(points[i].factor) || points[i].factor <= 0.0) {
            return fail(ErrorCode::bad_value, where + ": the factor must be above 0");
        }
        if (i > 0 && speed <= points[i - 1].speed.value()) {
            return fail(ErrorCode::bad_value,
                        where + ": the speed must be above that of the point before");
        }
    }
    return Gain{std::move(points)};
}

Gain Gain::unity() {
    return Gain{{GainPoint{MillimetresPerSecond::zero(), 1.0}}};
}

Gain Gain::with_speeds_times(double ratio) const {
    std::vector<GainPoint> points = m_points;
    for (GainPoint& point : points) {
        point.speed = point.speed * ratio;
    }
    return Gain{std::move(points)};
}

double Gain::factor_at(MillimetresPerSecond speed) const noexcept {
    const auto above = std::upper_bound(
        m_points.begin(), m_points.end(), speed,
        [](MillimetresPerSecond v, const GainPoint& point) { return v < point.speed; });
    if (above == m_points.begin()) {
        return m_points.front().factor;
    }
    if (above == m_points.end()) {
        return m_points.back().factor;
    }
    const GainPoint& low = *(above - 1);
    const double share = (speed - low.speed) / (above->speed - low.speed);
    return low.factor + share * (above->factor - low.factor);
}

} // namespace sagitta::estimator
