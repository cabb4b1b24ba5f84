// Common practice, no source: with the pivot near the middle of a device, path deviation is least
// with the sensor near the middle and rises about quadratically towards both ends, and the ends
// cost time.
#include "estimator/hand/turning_hand.hpp"

#include <cmath>
#include <doctest/doctest.h>

namespace {

using namespace sagitta::estimator;
using namespace sagitta::estimator::hand;

struct Cost {
    double squared_error = 0.0; ///< mean of the squared distance from the axis, mm^2
    double time_s = 0.0;
};

/// Movements in all directions, the same errors for every place of the sensor.
Cost cost_at(double sensor_ahead_mm, int movements) {
    const Person person;
    Cost cost;
    for (int i = 0; i < movements; ++i) {
        Random random{static_cast<std::uint64_t>(i), 3};
        const AimTask task{Millimetres::of(random.log_normal(8.0, 0.5)),
                           Degrees::of(random.uniform(0.0, 360.0)), Millimetres::of(1.2)};
        const TurningPath path =
            aim_turning(person, {}, task, Grip{}, {0.0, sensor_ahead_mm}, random);
        const Point end = path.places.back();
        const double net = std::hypot(end.x_mm, end.y_mm);
        double sum = 0.0;
        for (const Point& at : path.places) {
            const double y = (at.y_mm * end.x_mm - at.x_mm * end.y_mm) / net;
            sum += y * y;
        }
        cost.squared_error += sum / static_cast<double>(path.places.size()) / movements;
        cost.time_s += path.press_s / movements;
    }
    return cost;
}

TEST_CASE("a sensor at the pivot reads the truest path, and deviation rises towards both ends") {
    constexpr int k_movements = 250;
    const Cost rear = cost_at(-50.0, k_movements);
    const Cost half_rear = cost_at(-25.0, k_movements);
    const Cost middle = cost_at(0.0, k_movements);
    const Cost half_front = cost_at(25.0, k_movements);
    const Cost front = cost_at(50.0, k_movements);
    CHECK(middle.squared_error < half_front.squared_error);
    CHECK(middle.squared_error < half_rear.squared_error);
    CHECK(half_front.squared_error < front.squared_error);
    CHECK(half_rear.squared_error < rear.squared_error);
    // Twice the distance, about four times the rise of the squared deviation.
    const double ahead = (front.squared_error - middle.squared_error) /
                         (half_front.squared_error - middle.squared_error);
    const double behind = (rear.squared_error - middle.squared_error) /
                          (half_rear.squared_error - middle.squared_error);
    CHECK(ahead == doctest::Approx(4.0).epsilon(0.35));
    CHECK(behind == doctest::Approx(4.0).epsilon(0.35));
    CHECK(front.time_s > 1.01 * middle.time_s);
    CHECK(rear.time_s > 1.01 * middle.time_s);
}

TEST_CASE("a movement of a turning hand ends in its target and repeats with its seed") {
    const AimTask task{Millimetres::of(10.0), Degrees::of(90.0), Millimetres::of(1.5)};
    int reached = 0;
    for (std::uint64_t seed = 1; seed <= 50; ++seed) {
        Random random{seed};
        Random again{seed};
        const TurningPath path = aim_turning(Person{}, {}, task, Grip{}, {0.0, 30.0}, random);
        const TurningPath same = aim_turning(Person{}, {}, task, Grip{}, {0.0, 30.0}, again);
        const Point end = path.places.back();
        CHECK(end.x_mm == same.places.back().x_mm);
        CHECK(path.press_s == same.press_s);
        CHECK(path.position_at(path.press_s).y_mm == end.y_mm);
        CHECK(path.position_at(-1.0).x_mm == 0.0);
        reached += std::hypot(end.x_mm, end.y_mm - 10.0) <= 0.75 ? 1 : 0;
    }
    CHECK(reached >= 49);
}

} // namespace
