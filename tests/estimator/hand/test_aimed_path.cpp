#include "estimator/hand/aimed_path.hpp"
#include "estimator/moments.hpp"
#include "estimator/regression.hpp"

#include <algorithm>
#include <cmath>
#include <doctest/doctest.h>
#include <vector>

namespace {

using namespace sagitta::estimator;
using namespace sagitta::estimator::hand;

AimTask task(double distance_mm, double width_mm, double direction_deg = 0.0) {
    return {Millimetres::of(distance_mm), Degrees::of(direction_deg), Millimetres::of(width_mm)};
}

TEST_CASE("a minimum-jerk stroke peaks half-way at 1.875 times its mean speed") {
    // Source: Flash & Hogan (1985); constants analytic.
    AimedPath path;
    path.add({0.1, 0.8, {30.0, 40.0}, 0.0, 0.0});
    const double step = 1e-5;
    double peak = 0.0;
    double peak_at = 0.0;
    for (double t = 0.1; t < 0.9; t += 1e-3) {
        const Point before = path.position_at(t - step);
        const Point after = path.position_at(t + step);
        const double speed =
            std::hypot(after.x_mm - before.x_mm, after.y_mm - before.y_mm) / (2.0 * step);
        if (speed > peak) {
            peak = speed;
            peak_at = t;
        }
    }
    CHECK(peak / (50.0 / 0.8) == doctest::Approx(1.875).epsilon(1e-4));
    CHECK((peak_at - 0.1) / 0.8 == doctest::Approx(0.5).epsilon(2e-3));
    CHECK(path.motion_s() == doctest::Approx(0.9));
    CHECK(path.position_at(-1.0).x_mm == 0.0);
    CHECK(path.position_at(5.0).x_mm == doctest::Approx(30.0));
    CHECK(path.position_at(5.0).y_mm == doctest::Approx(40.0));
}

TEST_CASE("two strokes add up to the published pair of submovements") {
    // MJ(180 mm, 0.5 s at 0) + MJ(20 mm, 0.3 s at 0.45): at 0.486449 s the speed is 30.293 mm/s
    // and 180.262 mm are covered. Source: computed from the analytic form.
    AimedPath path;
    path.add({0.0, 0.5, {180.0, 0.0}, 0.0, 0.0});
    path.add({0.45, 0.3, {20.0, 0.0}, 0.0, 0.0});
    CHECK(path.position_at(0.486449).x_mm == doctest::Approx(180.262).epsilon(1e-5));
    const double speed =
        (path.position_at(0.486449 + 1e-5).x_mm - path.position_at(0.486449 - 1e-5).x_mm) / 2e-5;
    CHECK(speed == doctest::Approx(30.293).epsilon(1e-4));
    CHECK(path.end().x_mm == doctest::Approx(200.0));
}

TEST_CASE("bow and bend have the height that was asked for, to the left") {
    AimedPath bowed;
    bowed.add({0.0, 1.0, {0.0, 50.0}, 3.0, 0.0});
    CHECK(bowed.position_at(0.5).x_mm == doctest::Approx(-3.0)); // left of a movement away
    AimedPath bent;
    bent.add({0.0, 1.0, {50.0, 0.0}, 0.0, 2.0});
    double highest = 0.0;
    double lowest = 0.0;
    for (double t = 0.0; t < 1.0; t += 1e-3) {
        highest = std::max(highest, bent.position_at(t).y_mm);
        lowest = std::min(lowest, bent.position_at(t).y_mm);
    }
    CHECK(highest == doctest::Approx(2.0).epsilon(1e-4));
    CHECK(lowest == doctest::Approx(-2.0).epsilon(1e-4));
}

TEST_CASE("tremor has its frequency and amplitude, and no part at rest") {
    AimedPath path;
    path.add({0.0, 2.0, {1e-9, 0.0}, 0.0, 0.0});
    path.set_tremor({9.0, {0.0, 0.05}, {0.0, 0.0}});
    double peak = 0.0;
    int crossings = 0;
    double last = 0.0;
    for (double t = 0.2; t < 1.8; t += 1e-4) {
        const double y = path.position_at(t).y_mm;
        peak = std::max(peak, std::abs(y));
        crossings += last * y < 0.0 ? 1 : 0;
        last = y;
    }
    CHECK(peak == doctest::Approx(0.05).epsilon(1e-3));
    CHECK(crossings == doctest::Approx(1.6 * 9.0 * 2.0).epsilon(0.05));
    CHECK(path.position_at(0.0).y_mm == 0.0);
    CHECK(path.position_at(2.0).y_mm == 0.0);
    CHECK(path.position_at(3.0).y_mm == 0.0);
}

TEST_CASE("the movement-time law is recovered by regression on the difficulty") {
    Person person;
    person.index_of_performance = BitsPerSecond::of(4.0);
    person.intercept = std::chrono::milliseconds{250};
    Random random{21};
    std::vector<double> difficulty;
    std::vector<double> time;
    for (int i = 0; i < 12000; ++i) {
        const AimTask aimed = task(random.log_normal(6.0, 1.0), random.log_normal(0.8, 0.5));
        difficulty.push_back(std::log2(aimed.distance / aimed.width + 1.0));
        time.push_back(aim(person, {}, aimed, random).press_s());
    }
    const auto line = fit_line(difficulty, time);
    REQUIRE(line.has_value());
    CHECK(line->intercept == doctest::Approx(0.25).epsilon(0.10));
    CHECK(1.0 / line->slope == doctest::Approx(4.0).epsilon(0.03));
}

TEST_CASE("form scales the time and the performance") {
    const Person person;
    const AimTask aimed = task(10.0, 1.0);
    const double own = lawful_time_s(person, {}, aimed);
    CHECK(lawful_time_s(person, {1.0, 1.0, 1.1}, aimed) == doctest::Approx(1.1 * own));
    const double intercept = seconds(person.intercept);
    CHECK(lawful_time_s(person, {0.5, 1.0, 1.0}, aimed) - intercept ==
          doctest::Approx(2.0 * (own - intercept)));
}

TEST_CASE("presses scatter around the target as the person's endpoint spread says") {
    Person person;
    person.endpoint_spread = 1.0;
    Random random{4};
    Moments along;
    int hits = 0;
    constexpr int k_movements = 8000;
    for (int i = 0; i < k_movements; ++i) {
        const AimedPath path = aim(person, {}, task(20.0, 2.0), random);
        along.add(path.end().x_mm - 20.0);
        hits += std::abs(path.end().x_mm - 20.0) <= 1.0 ? 1 : 0;
    }
    CHECK(std::abs(along.mean) < 0.02);
    CHECK(4.133 * std::sqrt(along.variance()) == doctest::Approx(2.0).epsilon(0.03));
    // +-2.066 SD hold 96.12 %. Source: ISO 9241-411; Soukoreff & MacKenzie (2004).
    CHECK(hits / static_cast<double>(k_movements) == doctest::Approx(0.9612).epsilon(0.01));
}

TEST_CASE("smaller targets ask for more corrections, and everything ends in time") {
    Person person;
    person.detour_share = 0.0;
    Random random{9};
    Moments wide;
    Moments narrow;
    for (int i = 0; i < 3000; ++i) {
        const AimedPath easy = aim(person, {}, task(10.0, 5.0), random);
        const AimedPath hard = aim(person, {}, task(10.0, 0.3), random);
        wide.add(static_cast<double>(easy.submovements()));
        narrow.add(static_cast<double>(hard.submovements()));
        REQUIRE(hard.submovements() <= AimedPath::k_max_submovements);
        REQUIRE(hard.dwell_s() >= 0.0);
        REQUIRE(hard.motion_s() >= 0.0999);
    }
    CHECK(wide.mean < 1.6);
    CHECK(narrow.mean > wide.mean + 0.8);
}

TEST_CASE("a systematic bow shows on the left of every direction") {
    Person person;
    person.bow = 0.05;
    person.lateral_noise = 0.0;
    person.detour_share = 0.0;
    person.tremor_amplitude = Millimetres::zero();
    person.primary_spread = 0.0;
    Random random{2};
    for (double direction = 0.0; direction < 360.0; direction += 45.0) {
        const AimedPath path = aim(person, {}, task(20.0, 15.0, direction), random);
        REQUIRE(path.submovements() == 1);
        const Point end = path.end();
        const Point middle = path.position_at(0.5 * path.motion_s());
        const double net = std::hypot(end.x_mm, end.y_mm);
        const double left = (middle.y_mm * end.x_mm - middle.x_mm * end.y_mm) / net;
        CHECK(left == doctest::Approx(0.05 * net));
    }
}

TEST_CASE("walking a path gives the same places as asking for each") {
    const Person person;
    for (std::uint64_t seed = 1; seed <= 40; ++seed) {
        Random random{seed};
        const AimedPath path = aim(person, {}, task(30.0, 1.0, 75.0), random);
        constexpr double k_from = 0.0007;
        constexpr double k_step = 0.001;
        PathWalk walk{path, k_from, k_step};
        double farthest = 0.0;
        for (int i = 0; k_from + i * k_step < path.motion_s() + 0.1; ++i) {
            const Point walked = walk.next();
            const Point asked = path.position_at(k_from + i * k_step);
            farthest = std::max(
                {farthest, std::abs(walked.x_mm - asked.x_mm), std::abs(walked.y_mm - asked.y_mm)});
        }
        CHECK(farthest < 1e-9);
    }
}

TEST_CASE("a wandering moves its legs without a press") {
    const Person person;
    Random random{3};
    const AimedPath path =
        wander(person, {}, AimedPath::k_max_submovements, Millimetres::of(4.0), random);
    CHECK(path.submovements() == AimedPath::k_max_submovements);
    CHECK(path.motion_s() > 2.0);
    CHECK(path.dwell_s() == 0.0);
}

} // namespace
