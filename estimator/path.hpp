// The continuous path of a movement, rebuilt from the staircase of counts. What is computed from
// it does not depend on the pointer's report rate or resolution.
#pragma once

#include "estimator/calibration.hpp"
#include "estimator/units.hpp"

#include <cstddef>
#include <span>
#include <vector>

namespace sagitta::estimator {

/// Sampling of reconstructed paths: 200 Hz.
constexpr Micros k_sample_interval{5000};
constexpr double k_sample_rate_hz = 200.0;

/// A path sampled at k_sample_interval. All vectors have one element a sample; element 0 is the
/// movement's start, the last its end; both are interpolated to the exact crossing of the speed
/// threshold, so the samples are spaced by `interval_s`, within 1 % of 5 ms for movements that
/// last over half a second.
struct Path {
    PointerTime start{};
    PointerTime end{};
    double interval_s = 0.0;
    std::vector<double> x_px;         ///< screen plane, origin = resting point, + = right
    std::vector<double> y_px;         ///< + = away from the person
    std::vector<double> speed_mm_s;   ///< hand plane, >= 0
    std::vector<double> x_mm;         ///< hand plane
    std::vector<double> y_mm;
    double press_x_px = 0.0;          ///< where the button was pressed
    double press_y_px = 0.0;

    [[nodiscard]] std::size_t size() const noexcept { return x_px.size(); }
};

} // namespace sagitta::estimator
