#include "estimator/hand/body.hpp"

#include <cmath>

namespace sagitta::estimator::hand {

namespace {

Point rotated(Point v, double angle) {
    const double c = std::cos(angle);
    const double s = std::sin(angle);
    return {c * v.x_mm - s * v.y_mm, s * v.x_mm + c * v.y_mm};
}

/// sin(x) / x.
double sinc(double x) {
    return std::abs(x) < 1e-8 ? 1.0 : std::sin(x) / x;
}

} // namespace

Point sweep_reading(const Sweep& sweep, Point sensor, double progress) noexcept {
    const double turn = sweep.turn * progress;
    const double shrink = sinc(turn / 2.0) * progress;
    const Point moved = rotated(sweep.translation, -(sweep.start_heading + turn / 2.0));
    return {shrink * moved.x_mm - turn * sensor.y_mm, shrink * moved.y_mm + turn * sensor.x_mm};
}

Point integrated_reading(const std::function<Pose(double)>& pose, Point sensor, double from_s,
                         double to_s, int steps) {
    Point reading;
    Pose last = pose(from_s);
    for (int i = 1; i <= steps; ++i) {
        const Pose next = pose(from_s + (to_s - from_s) * i / steps);
        const Sweep step{{next.pivot.x_mm - last.pivot.x_mm, next.pivot.y_mm - last.pivot.y_mm},
                         last.heading,
                         next.heading - last.heading};
        const Point read = sweep_reading(step, sensor, 1.0);
        reading.x_mm += read.x_mm;
        reading.y_mm += read.y_mm;
        last = next;
    }
    return reading;
}

double turn_from_two(Point reading_a, Point sensor_a, Point reading_b, Point sensor_b) noexcept {
    // u_b - u_a = turn * J (r_b - r_a)
    const double across_x = -(sensor_b.y_mm - sensor_a.y_mm);
    const double across_y = sensor_b.x_mm - sensor_a.x_mm;
    const double difference_x = reading_b.x_mm - reading_a.x_mm;
    const double difference_y = reading_b.y_mm - reading_a.y_mm;
    return (difference_x * across_x + difference_y * across_y) /
           (across_x * across_x + across_y * across_y);
}

Point weighted_reading(Point reading_a, Point reading_b, double share) noexcept {
    return {reading_a.x_mm + share * (reading_b.x_mm - reading_a.x_mm),
            reading_a.y_mm + share * (reading_b.y_mm - reading_a.y_mm)};
}

} // namespace sagitta::estimator::hand
