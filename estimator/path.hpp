// The continuous path of a movement, rebuilt from the staircase of counts. What is computed from
// it does not depend on the pointer's report rate or resolution.
#pragma once

#include "estimator/butterworth.hpp"
#include "estimator/calibration.hpp"
#include "estimator/units.hpp"

#include <cstddef>
#include <span>
#include <vector>

namespace sagitta::estimator {

/// Sampling of reconstructed paths: 200 Hz.
constexpr Micros k_sample_interval{5000};
constexpr double k_sample_interval_s = 0.005;
constexpr double k_sample_rate_hz = 200.0;
/// Pass band of reconstructed paths: the hand's motion, without the staircase of counts.
constexpr double k_path_cutoff_hz = 10.0;
/// A movement starts and ends where its speed crosses this share of its peak.
constexpr double k_speed_threshold = 0.1;

/// A run's path. It begins at rest in the origin and ends at rest where the button was pressed.
///
/// Samples are k_sample_interval apart. The vectors cover the whole run with its padding of rest;
/// the movement itself is the samples [first, last], those between the crossings of the speed
/// threshold, which lie at `start` and `end`.
struct Path {
    std::vector<double> x_px;    ///< screen plane, + = right
    std::vector<double> y_px;    ///< screen plane, + = away from the person
    std::vector<double> vx_mm_s; ///< hand plane, + = right
    std::vector<double> vy_mm_s; ///< hand plane, + = away from the person
    std::vector<double> speed_mm_s;
    std::size_t first = 0;
    std::size_t last = 0;
    PointerTime start{};
    PointerTime end{};
    double peak_speed_mm_s = 0.0;
    PointerTime peak_time{};
    double peak_sample = 0.0; ///< the same as a place between samples
    double length_px = 0.0;   ///< L, from the origin to the press
    double length_mm = 0.0;   ///< the same in the hand plane
    double press_x_px = 0.0;  ///< where the button was pressed
    double press_y_px = 0.0;
};

/// Rebuilds paths. Keeps its working memory from one path to the next.
///
/// 1. Each axis' counts, as ramps (see MotionGrid), are padded by rest and low-pass filtered
///    forward and backward by a second-order Butterworth filter, -3 dB at k_path_cutoff_hz after
///    both passes.
/// 2. Velocity is the central difference of the filtered path in mm; the peak of speed is that of
///    the parabola fitted to the seven samples around the highest.
/// 3. Start and end are the first and the last crossing of k_speed_threshold of the peak, by
///    linear interpolation.
/// 4. A gain table acts on the smooth speed; a flat gain is a factor.
class PathBuilder {
public:
    PathBuilder();

    /// @param x, y        counts at `origin`, origin + k_sample_interval, ...; n >= 1 each; the
    ///                    sign of y is the kernel's
    /// @param calibration of the pointer
    /// @return the path, valid until the next call; its peak speed is 0 when nothing moved
    const Path& build(std::span<const double> x, std::span<const double> y, PointerTime origin,
                      const Calibration& calibration);

private:
    void pad(std::span<const double> x, std::span<const double> y);
    void differentiate(const Calibration& calibration);
    void find_ends(PointerTime padded_origin);
    void project(double last_x, double last_y, const Calibration& calibration);

    LowPass m_filter;
    std::vector<double> m_x; ///< counts, padded and filtered
    std::vector<double> m_y;
    Path m_path;
};

} // namespace sagitta::estimator
