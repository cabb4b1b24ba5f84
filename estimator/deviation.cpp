#include "estimator/deviation.hpp"

#include <algorithm>
#include <cmath>

namespace sagitta::estimator {

Deviation deviation(std::span<const double> y_px) noexcept {
    const double n = static_cast<double>(y_px.size());
    double sum = 0.0;
    double sum_absolute = 0.0;
    double largest = 0.0;
    for (const double y : y_px) {
        const double absolute = std::abs(y);
        sum += y;
        sum_absolute += absolute;
        largest = std::max(largest, absolute);
    }
    const double mean = sum / n;
    double squares = 0.0;
    for (const double y : y_px) {
        squares += (y - mean) * (y - mean);
    }
    return {Pixels::of(sum_absolute / n), Pixels::of(mean),
            Pixels::of(std::sqrt(squares / (n - 1.0))), Pixels::of(largest)};
}

} // namespace sagitta::estimator
