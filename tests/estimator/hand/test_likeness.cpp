// The defaults against figures computed from open recordings of everyday work, on the continuous
// paths and with wide bands; tests/bench/bench_likeness prints the same through the pipeline.
#include "estimator/hand/aimed_path.hpp"
#include "estimator/hand/desk.hpp"
#include "estimator/regression.hpp"

#include <algorithm>
#include <cmath>
#include <doctest/doctest.h>
#include <vector>

namespace {

using namespace sagitta::estimator;
using namespace sagitta::estimator::hand;

constexpr double k_mm_per_px = 25.4 / 1000.0;

double median(std::vector<double> values) {
    const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
    std::nth_element(values.begin(), middle, values.end());
    return *middle;
}

struct Shape {
    double distance_px, ratio, error_px;
};

Shape shape_of(const AimedPath& path) {
    const Point end = path.end();
    const double net = std::hypot(end.x_mm, end.y_mm);
    double length = 0.0;
    double away = 0.0;
    Point last;
    const int steps = static_cast<int>(path.motion_s() / 0.005);
    for (int i = 1; i <= steps; ++i) {
        const Point at = path.position_at(i * 0.005);
        length += std::hypot(at.x_mm - last.x_mm, at.y_mm - last.y_mm);
        away += std::abs(at.y_mm * end.x_mm - at.x_mm * end.y_mm) / net;
        last = at;
    }
    return {net / k_mm_per_px, length / net, away / steps / k_mm_per_px};
}

TEST_CASE("the default person's movements are shaped like those of everyday work") {
    const TargetMix targets;
    Random random{12};
    std::vector<double> distance, time, ratio, error, log_distance, log_error, log_rate;
    for (int i = 0; i < 1500; ++i) {
        const double reach = random.log_normal(targets.distance.value(), targets.distance_spread);
        const double width = random.log_normal(targets.width.value(), targets.width_spread);
        if (reach < 22.0) {
            continue;
        }
        const AimedPath path =
            aim(Person{}, {},
                {Millimetres::of(reach * k_mm_per_px), Degrees::of(random.uniform(0.0, 360.0)),
                 Millimetres::of(std::min(width, reach) * k_mm_per_px)},
                random);
        const Shape shape = shape_of(path);
        if (shape.distance_px < 20.0 || path.press_s() > 4.0) {
            continue;
        }
        distance.push_back(shape.distance_px);
        time.push_back(path.press_s());
        ratio.push_back(shape.ratio);
        error.push_back(shape.error_px);
        log_distance.push_back(std::log(shape.distance_px));
        log_error.push_back(std::log(std::max(shape.error_px, 0.1)));
        log_rate.push_back(std::log(std::log2(shape.distance_px / 20.0 + 1.0) / path.press_s()));
    }
    CHECK(median(distance) == doctest::Approx(194.0).epsilon(0.10));
    CHECK(median(time) == doctest::Approx(0.91).epsilon(0.15));
    CHECK(median(ratio) > 1.07);
    CHECK(median(ratio) < 1.25);
    CHECK(median(error) == doctest::Approx(8.7).epsilon(0.25));

    const auto line = fit_line(log_distance, log_error);
    REQUIRE(line.has_value());
    CHECK(line->slope > 0.57);
    CHECK(line->slope < 0.92);
    CHECK(line->residual_sd == doctest::Approx(1.1).epsilon(0.15));
    Moments rate;
    for (const double value : log_rate) {
        rate.add(value);
    }
    CHECK(std::sqrt(rate.variance()) == doctest::Approx(0.47).epsilon(0.15));
}

} // namespace
