// Values: derived in closed form; checked by numerical integration. The millimetres are the
// closed form evaluated with 30 digits.
#include "estimator/hand/body.hpp"

#include <cmath>
#include <doctest/doctest.h>
#include <numbers>
#include <vector>

namespace {

using namespace sagitta::estimator;
using namespace sagitta::estimator::hand;

constexpr double k_degree = std::numbers::pi / 180.0;

void check_near(Point actual, Point expected, double tolerance) {
    CHECK(std::abs(actual.x_mm - expected.x_mm) <= tolerance);
    CHECK(std::abs(actual.y_mm - expected.y_mm) <= tolerance);
}

struct Case {
    const char* name;
    Sweep sweep;
    Point sensor;
    Point reading_mm;
    double cpi;
    Point counts;
};

const std::vector<Case>& cases() {
    static const std::vector<Case> table{{"rotation only",
                                          {{0, 0}, 0, 10 * k_degree},
                                          {0, 60},
                                          {-10.471975511966, 0},
                                          1000,
                                          {-412.282500, 0}},
                                         {"elbow",
                                          {{0, 0}, 0, 15 * k_degree},
                                          {0, 300},
                                          {-78.539816339745, 0},
                                          1000,
                                          {-3092.118754, 0}},
                                         {"both",
                                          {{100, 0}, 0, 20 * k_degree},
                                          {0, 40},
                                          {84.018919589147, -17.276791512312},
                                          800,
                                          {2646.265184, -544.150914}},
                                         {"symmetric",
                                          {{100, 0}, -10 * k_degree, 20 * k_degree},
                                          {0, 40},
                                          {85.530442988575, 0},
                                          800,
                                          {2693.872220, 0}},
                                         {"general",
                                          {{80, -60}, 0.3, -0.5},
                                          {12, 35},
                                          {93.602715347853, -69.259558689270},
                                          800,
                                          {2948.117019, -2181.403423}},
                                         {"quarter turn about the sensor",
                                          {{0, 50}, 0, 90 * k_degree},
                                          {0, 0},
                                          {31.830988618379, 31.830988618379},
                                          800,
                                          {1002.550823, 1002.550823}}};
    return table;
}

TEST_CASE("an off-pivot sensor reads what the closed form says, in mm and counts") {
    for (const Case& c : cases()) {
        CAPTURE(c.name);
        const Point reading = sweep_reading(c.sweep, c.sensor, 1.0);
        check_near(reading, c.reading_mm, 1e-9);
        const double counts_per_mm = c.cpi / k_mm_per_inch;
        check_near({reading.x_mm * counts_per_mm, reading.y_mm * counts_per_mm}, c.counts, 1e-6);
    }
}

TEST_CASE("integrating the reading rate gives the closed form, whatever the speed profile") {
    for (const Case& c : cases()) {
        CAPTURE(c.name);
        const auto pose = [&c](double t) {
            const double s = minimum_jerk(t);
            return Pose{{c.sweep.translation.x_mm * s, c.sweep.translation.y_mm * s},
                        c.sweep.start_heading + c.sweep.turn * s};
        };
        check_near(integrated_reading(pose, c.sensor, 0.0, 1.0, 200), c.reading_mm, 1e-9);
    }
}

TEST_CASE("integration converges when pivot and heading follow profiles of their own") {
    // The heading arrives later than the pivot, so that no closed form of one sweep holds.
    const auto pose = [](double t) {
        return Pose{{100.0 * minimum_jerk(t), 20.0 * minimum_jerk(t)},
                    0.6 * minimum_jerk(t) * minimum_jerk(t)};
    };
    const Point sensor{5.0, 40.0};
    const Point coarse = integrated_reading(pose, sensor, 0.0, 1.0, 200);
    const Point fine = integrated_reading(pose, sensor, 0.0, 1.0, 400);
    const Point finest = integrated_reading(pose, sensor, 0.0, 1.0, 3200);
    const double coarse_error = std::hypot(coarse.x_mm - finest.x_mm, coarse.y_mm - finest.y_mm);
    const double fine_error = std::hypot(fine.x_mm - finest.x_mm, fine.y_mm - finest.y_mm);
    CHECK(coarse_error < 1e-3);
    CHECK(coarse_error / fine_error == doctest::Approx(4.0).epsilon(0.1)); // second order
}

TEST_CASE("a straight push with 20 degrees of rotation reads as a curve") {
    const Sweep sweep{{100, 0}, 0, 20 * k_degree};
    const Point sensor{0, 40};
    check_near(sweep_reading(sweep, sensor, 0.25), {21.477623, -1.090139}, 1e-6);
    check_near(sweep_reading(sweep, sensor, 0.50), {42.765221, -4.352258}, 1e-6);
    check_near(sweep_reading(sweep, sensor, 0.75), {63.674219, -9.761532}, 1e-6);

    const Point end = sweep_reading(sweep, sensor, 1.0);
    const double net = std::hypot(end.x_mm, end.y_mm);
    double sagitta_mm = 0.0;
    double length = 0.0;
    Point last;
    constexpr int k_steps = 100000;
    for (int i = 1; i <= k_steps; ++i) {
        const Point at = sweep_reading(sweep, sensor, i / static_cast<double>(k_steps));
        length += std::hypot(at.x_mm - last.x_mm, at.y_mm - last.y_mm);
        const double away = (at.y_mm * end.x_mm - at.x_mm * end.y_mm) / net;
        sagitta_mm = std::max(sagitta_mm, std::abs(away));
        last = at;
    }
    CHECK(net == doctest::Approx(85.776841).epsilon(1e-8));
    CHECK(sagitta_mm == doctest::Approx(4.350522).epsilon(1e-6));
    CHECK(length == doctest::Approx(86.363820).epsilon(1e-7));
    CHECK(net / length == doctest::Approx(0.993203408).epsilon(1e-8));
}

TEST_CASE("the order of moving and turning matters") {
    const Point sensor{0, 40};
    const double turn = 20 * k_degree;
    const Sweep move{{100, 0}, 0, 0};
    const auto sum = [&](const Sweep& first, const Sweep& second) {
        const Point a = sweep_reading(first, sensor, 1.0);
        const Point b = sweep_reading(second, sensor, 1.0);
        return Point{a.x_mm + b.x_mm, a.y_mm + b.y_mm};
    };
    check_near(sum(move, {{0, 0}, 0, turn}), {86.037366, 0}, 1e-6);
    check_near(sum({{0, 0}, 0, turn}, {{100, 0}, turn, 0}), {80.006628, -34.202014}, 1e-6);
    check_near(sweep_reading({{100, 0}, 0, turn}, sensor, 1.0), {84.018920, -17.276792}, 1e-6);
}

TEST_CASE("turning there and back returns the reading to where it was") {
    const Point sensor{15, -42};
    const Point there = sweep_reading({{0, 0}, 0, 0.7}, sensor, 1.0);
    const Point back = sweep_reading({{0, 0}, 0.7, -0.7}, sensor, 1.0);
    check_near({there.x_mm + back.x_mm, there.y_mm + back.y_mm}, {0, 0}, 1e-12);
    CHECK(std::hypot(there.x_mm, there.y_mm) == doctest::Approx(0.7 * std::hypot(15, 42)));
}

TEST_CASE("two sensors of one body give its turn and the reading at any place between") {
    const Point a{-10, -50};
    const Point b{8, 55};
    for (const Case& c : cases()) {
        CAPTURE(c.name);
        const Point at_a = sweep_reading(c.sweep, a, 1.0);
        const Point at_b = sweep_reading(c.sweep, b, 1.0);
        CHECK(std::abs(turn_from_two(at_a, a, at_b, b) - c.sweep.turn) < 1e-12);
        // Common practice, no source: a reading weighted between two sensors equals that of a
        // sensor between them within 1 %. For a rigid body it is exact.
        for (const double share : {0.0, 0.2, 0.5, 0.9, 1.0}) {
            const Point between{a.x_mm + share * (b.x_mm - a.x_mm),
                                a.y_mm + share * (b.y_mm - a.y_mm)};
            check_near(weighted_reading(at_a, at_b, share), sweep_reading(c.sweep, between, 1.0),
                       1e-9);
        }
    }
}

} // namespace
