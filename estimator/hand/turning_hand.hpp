// An aimed movement of a hand that turns while it pushes, read by a sensor anywhere on the device:
// how much path and time the sensor's place costs.
#pragma once

#include "estimator/hand/body.hpp"

#include <cstddef>
#include <vector>

namespace sagitta::estimator::hand {

/// How surely the hand keeps the device's heading. Angles in rad for a stroke of
/// k_noise_distance; they grow with the stroke like Person::lateral_noise.
struct Grip {
    Point pivot;            ///< place on the device that the hand turns about, from its middle
    double turn_sd = 0.006; ///< turn left over at a stroke's end
    double sway_sd = 0.006; ///< turn that comes and goes within a stroke
};

/// Spacing of TurningPath's places, s.
constexpr double k_turning_step_s = 0.002;

/// What the sensor reads from start to press.
struct TurningPath {
    std::vector<Point> places; ///< every k_turning_step_s while the hand moves, from (0, 0)
    double press_s;            ///< from the start, dwell included
    std::size_t strokes;

    /// The reading at any time, linear between places; still after the last.
    [[nodiscard]] Point position_at(double time_s) const noexcept;
};

/// A movement under visual control: strokes of a rigid hand and device are aimed at what is left
/// to the target, until the reading is within it. Each stroke errs along and across by the
/// person's figures and turns by the grip's; the sensor reads the turn according to its place, and
/// vision corrects what comes of it. A stroke lasts as long as the movement-time law gives for its
/// own reach without the intercept, plus k_stroke_latency_s. Source of corrections by repeated
/// strokes: Crossman & Goodeve (1963).
/// @param sensor  place on the device, from its middle, + y = front
[[nodiscard]] TurningPath aim_turning(const Person& person, const Form& form, const AimTask& task,
                                      const Grip& grip, Point sensor, Random& random);

constexpr double k_stroke_latency_s = 0.10;

} // namespace sagitta::estimator::hand
