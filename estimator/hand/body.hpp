// A hand and the device in it, turning as one rigid body about a pivot: what a sensor reads that
// does not sit at the pivot.
#pragma once

#include "estimator/hand/aimed_path.hpp"

#include <functional>

namespace sagitta::estimator::hand {

/// The body moves and turns at the same time, by one common time profile. Angles in rad,
/// counter-clockwise.
struct Sweep {
    Point translation;          ///< of the pivot, world
    double start_heading = 0.0; ///< heading at progress 0
    double turn = 0.0;          ///< heading gained by progress 1
};

/// What the sensor has read by `progress`, mm in the sensor's own axes. In closed form, with V the
/// translation, phi the turn and J the quarter turn: u = sin(phi/2)/(phi/2) R(-(theta0 + phi/2)) V
/// + phi J r. Source: derived in closed form from u' = R(-theta) p' + theta' J r; checked by
/// numerical integration.
/// @param sensor    place of the sensor on the body, from the pivot
/// @param progress  0 to 1
[[nodiscard]] Point sweep_reading(const Sweep& sweep, Point sensor, double progress) noexcept;

/// Where the pivot is and how the body is turned at a time.
struct Pose {
    Point pivot;          ///< world
    double heading = 0.0; ///< rad
};

/// Reading of the sensor over [from_s, to_s] for any motion. Each step between two poses is taken
/// as a Sweep, which is exact when pivot and heading share one time profile, and of second order
/// in the step otherwise.
/// @param steps  >= 1
[[nodiscard]] Point integrated_reading(const std::function<Pose(double)>& pose, Point sensor,
                                       double from_s, double to_s, int steps);

/// Turn of a body between two moments from the readings of two of its sensors.
/// Precondition: the sensors are apart.
[[nodiscard]] double turn_from_two(Point reading_a, Point sensor_a, Point reading_b,
                                   Point sensor_b) noexcept;

/// The reading of a sensor at `share` of the way from a to b, weighted from the readings at a and
/// b. Exact for a rigid body, since a reading is linear in the sensor's place.
[[nodiscard]] Point weighted_reading(Point reading_a, Point reading_b, double share) noexcept;

} // namespace sagitta::estimator::hand
