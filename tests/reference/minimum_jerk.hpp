// Minimum-jerk speed: v(t) = D/T (30 u^2 - 60 u^3 + 30 u^4), u = (t - onset)/T.
// Source: Flash & Hogan (1985).
#pragma once

#include <cmath>
#include <cstddef>
#include <vector>

namespace sagitta::tests {

struct MinimumJerk {
    double distance;
    double duration_s;
    double onset_s;

    [[nodiscard]] double speed(double time_s) const {
        const double u = (time_s - onset_s) / duration_s;
        if (u <= 0.0 || u >= 1.0) {
            return 0.0;
        }
        return distance / duration_s * 30.0 * u * u * (1.0 - u) * (1.0 - u);
    }
    [[nodiscard]] double place(double time_s) const {
        const double u = (time_s - onset_s) / duration_s;
        if (u <= 0.0) {
            return 0.0;
        }
        return u >= 1.0 ? distance : distance * u * u * u * (10.0 + u * (6.0 * u - 15.0));
    }
};

/// The sum of the movements' speeds at 0, 1/rate, ... up to and with `until_s`.
inline std::vector<double> sum_of_speeds(const std::vector<MinimumJerk>& movements, double rate_hz,
                                         double until_s) {
    const auto n = static_cast<std::size_t>(std::lround(until_s * rate_hz)) + 1;
    std::vector<double> speed(n, 0.0);
    for (std::size_t i = 0; i < n; ++i) {
        for (const MinimumJerk& movement : movements) {
            speed[i] += movement.speed(static_cast<double>(i) / rate_hz);
        }
    }
    return speed;
}

} // namespace sagitta::tests
