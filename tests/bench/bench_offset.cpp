// bench_offset [MOVEMENTS [TURN_DEG]]
//
// What the place of the sensor on the device costs a hand that turns about a pivot near the
// device's middle: path deviation and movement time by place, beside the middle's. Practitioners
// say (common practice, no source): deviation is least near the middle and rises about
// quadratically to both ends; the ends cost time, about 10 % at the front and 14 % at the rear.
// TURN_DEG is the SD of a stroke's turn; without it, the simulated hand's own.
#include "estimator/hand/turning_hand.hpp"

#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <numbers>

namespace {

using namespace sagitta::estimator;
using namespace sagitta::estimator::hand;

constexpr double k_ends_mm = 50.0;
constexpr double k_pivot_ahead_mm = 5.0;
constexpr double k_degrees_per_radian = 180.0 / std::numbers::pi;

struct Cost {
    double error_mm = 0.0;    ///< ME, mean over movements
    double squared_mm2 = 0.0; ///< mean of the squared distance from the axis
    double time_s = 0.0;
    double strokes = 0.0;
};

Cost cost_at(const Grip& grip, double sensor_ahead_mm, int movements) {
    const Person person;
    Cost cost;
    for (int i = 0; i < movements; ++i) {
        Random random{static_cast<std::uint64_t>(i), 3};
        const AimTask task{Millimetres::of(random.log_normal(5.0, 1.0)),
                           Degrees::of(random.uniform(0.0, 360.0)), Millimetres::of(0.85)};
        const TurningPath path =
            aim_turning(person, {}, task, grip, {0.0, sensor_ahead_mm}, random);
        const Point end = path.places.back();
        const double net = std::hypot(end.x_mm, end.y_mm);
        const auto n = static_cast<double>(path.places.size());
        for (const Point& at : path.places) {
            const double y = net > 0.0 ? (at.y_mm * end.x_mm - at.x_mm * end.y_mm) / net : 0.0;
            cost.error_mm += std::abs(y) / n / movements;
            cost.squared_mm2 += y * y / n / movements;
        }
        cost.time_s += path.press_s / movements;
        cost.strokes += static_cast<double>(path.strokes) / movements;
    }
    return cost;
}

} // namespace

int main(int argc, char** argv) {
    const int movements = argc > 1 ? std::atoi(argv[1]) : 4000;
    Grip grip;
    grip.pivot = {0.0, k_pivot_ahead_mm};
    if (argc > 2) {
        grip.turn_sd = std::atof(argv[2]) / k_degrees_per_radian;
        grip.sway_sd = grip.turn_sd;
    }
    if (movements < 1 || !(grip.turn_sd >= 0.0 && grip.turn_sd <= 0.1)) {
        std::fprintf(stderr, "usage: bench_offset [MOVEMENTS [TURN_DEG]], 1 or more, 0 to 5.7\n");
        return 2;
    }
    const Cost middle = cost_at(grip, 0.0, movements);
    std::printf("%d movements a place, pivot %.0f mm ahead of the device's middle\n\n", movements,
                k_pivot_ahead_mm);
    std::printf("%22s %8s %10s %10s %8s %9s\n", "sensor ahead of middle", "ME, mm", "MSE, mm^2",
                "MT, s", "MT, %", "strokes");
    for (double place = -k_ends_mm; place <= k_ends_mm; place += 12.5) {
        const Cost cost = cost_at(grip, place, movements);
        std::printf("%19.1f mm %8.3f %10.4f %10.3f %+7.1f%% %9.2f\n", place, cost.error_mm,
                    cost.squared_mm2, cost.time_s, 100.0 * (cost.time_s / middle.time_s - 1.0),
                    cost.strokes);
    }
    std::printf(
        "\nThe model holds no target for these figures: they follow from how far one stroke "
        "turns\n(SD %.2f deg at %.0f mm) times the sensor's distance from the pivot.\n",
        grip.turn_sd * k_degrees_per_radian, k_noise_distance.value());
    return 0;
}
