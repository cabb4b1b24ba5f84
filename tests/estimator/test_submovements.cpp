#include "estimator/butterworth.hpp"
#include "estimator/submovements.hpp"
#include "tests/reference/minimum_jerk.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <cmath>
#include <cstdint>
#include <random>
#include <utility>

namespace sagitta::estimator {
namespace {

using tests::MinimumJerk;

constexpr double k_rate_hz = 200.0;

Submovements of(const std::vector<MinimumJerk>& movements, double rate_hz = k_rate_hz,
                double until_s = 0.9) {
    return find_submovements(tests::sum_of_speeds(movements, rate_hz, until_s));
}

TEST_CASE("one minimum-jerk movement is one piece that ends at its last sample") {
    const Submovements found = of({{200.0, 0.6, 0.1}});
    CHECK(found.count == 1);
    CHECK(found.primary_end == 180.0);
}

TEST_CASE("nothing moves: one piece") {
    const Submovements found = find_submovements(std::vector<double>(10, 0.0));
    CHECK(found.count == 1);
    CHECK(found.primary_end == 9.0);
}

TEST_CASE("movements apart in time are as many pieces, at every report rate") {
    for (const double rate : {125.0, 200.0, 1000.0}) {
        CAPTURE(rate);
        for (int pieces = 1; pieces <= 5; ++pieces) {
            std::vector<MinimumJerk> movements;
            for (int i = 0; i < pieces; ++i) {
                movements.push_back({100.0 / (1 + i), 0.3, 0.35 * i});
            }
            CHECK(of(movements, rate, 2.0).count == pieces);
        }
    }
}

TEST_CASE("a reversal ends the primary submovement where the velocity crosses zero") {
    // 200 mm out in .5 s, 15 mm back in .3 s from .42 s on: the sum crosses zero between.
    const std::vector<MinimumJerk> movements = {{200.0, 0.5, 0.0}, {-15.0, 0.3, 0.42}};
    double low = 0.43;
    double high = 0.49;
    for (int i = 0; i < 60; ++i) { // the root, by bisection
        const double middle = (low + high) / 2.0;
        const bool is_forward = movements[0].speed(middle) + movements[1].speed(middle) > 0.0;
        (is_forward ? low : high) = middle;
    }
    for (const double rate : {200.0, 1000.0}) {
        const Submovements found = of(movements, rate);
        CHECK(found.count == 2);
        CHECK(std::abs(found.primary_end / rate - low) < 1e-3);
    }
}

TEST_CASE("a reversal or a speed-up below 5 percent of the peak is not counted") {
    // Peak speeds: 750 mm/s, and 1.875 d / .2 of the second movement.
    const double small = 0.045 * 750.0 * 0.2 / 1.875;
    const double large = 0.055 * 750.0 * 0.2 / 1.875;
    for (const double sign : {1.0, -1.0}) {
        CAPTURE(sign);
        CHECK(of({{200.0, 0.5, 0.0}, {sign * small, 0.2, 0.55}}).count == 1);
        CHECK(of({{200.0, 0.5, 0.0}, {sign * large, 0.2, 0.55}}).count == 2);
    }
}

TEST_CASE("an inflection ends the primary submovement where the deceleration is least") {
    // 40 mm in .3 s from .32 s on stretches the fall without a second peak. The time is the
    // maximum of the acceleration of the two formulas, 1e-5 s steps.
    const std::vector<MinimumJerk> movements = {{180.0, 0.5, 0.0}, {40.0, 0.3, 0.32}};
    const auto acceleration = [&](double time) {
        double sum = 0.0;
        for (const MinimumJerk& movement : movements) {
            sum += (movement.speed(time + 1e-5) - movement.speed(time - 1e-5)) / 2e-5;
        }
        return sum;
    };
    double best = 0.34;
    for (double time = 0.34; time < 0.42; time += 1e-5) {
        best = acceleration(time) > acceleration(best) ? time : best;
    }
    REQUIRE(acceleration(best) < 0.0); // no second peak
    for (const double rate : {200.0, 1000.0}) {
        CAPTURE(rate);
        const Submovements found = of(movements, rate);
        CHECK(found.count == 2);
        CHECK(std::abs(found.primary_end / rate - best) < 1e-3);
    }
}

TEST_CASE("a slight inflection is not counted") {
    // A tenth of the correction above.
    CHECK(of({{180.0, 0.5, 0.0}, {4.0, 0.3, 0.32}}).count == 1);
}

TEST_CASE("an inflection from which the speed falls by less than 5 percent is not counted") {
    // A fall to 4 % of the peak, then a rest and a further fall: the rest would stand out.
    std::vector<double> velocity;
    for (int i = 0; i <= 10; ++i) {
        velocity.push_back(10.0 * i);
    }
    for (const auto& [steps, slope] :
         {std::pair{24, -4.0}, std::pair{20, 0.0}, std::pair{2, -2.0}}) {
        for (int i = 0; i < steps; ++i) {
            velocity.push_back(velocity.back() + slope);
        }
    }
    REQUIRE(velocity.back() == 0.0);
    CHECK(find_submovements(velocity).count == 1);
    // The same with the rest at 8 %.
    for (std::size_t i = 11; i < velocity.size(); ++i) {
        velocity[i] += i + 2 < velocity.size() ? 4.0 : 0.0;
    }
    CHECK(find_submovements(velocity).count == 2);
}

TEST_CASE("two inflections in one fall count as two") {
    // A steady fall of 4 units a sample with two stretches of rest, each worth 40 units.
    std::vector<double> velocity;
    for (int i = 0; i <= 20; ++i) {
        velocity.push_back(20.0 * i);
    }
    for (const int steps : {30, 10, 30, 10, 20}) {
        const double slope = steps == 10 ? 0.0 : -5.0;
        for (int i = 0; i < steps; ++i) {
            velocity.push_back(velocity.back() + slope);
        }
    }
    REQUIRE(velocity.back() == 0.0);
    const Submovements found = find_submovements(velocity);
    CHECK(found.count == 3);
    CHECK(found.primary_end > 50.0);
    CHECK(found.primary_end < 61.0);
}

TEST_CASE("a movement that first goes the wrong way has a piece before its primary one") {
    const Submovements found = of({{-30.0, 0.2, 0.0}, {200.0, 0.5, 0.2}, {30.0, 0.25, 0.65}});
    CHECK(found.count == 3);
    CHECK(found.primary_end / k_rate_hz > 0.6);
    CHECK(found.primary_end / k_rate_hz < 0.75);
}

TEST_CASE("the unit of velocity does not matter") {
    auto velocity = tests::sum_of_speeds({{180.0, 0.5, 0.0}, {40.0, 0.3, 0.32}}, 200.0, 0.9);
    const Submovements before = find_submovements(velocity);
    for (double& value : velocity) {
        value *= 1e-3;
    }
    const Submovements after = find_submovements(velocity);
    CHECK(after.count == before.count);
    CHECK(after.primary_end == doctest::Approx(before.primary_end).epsilon(1e-9));
}

TEST_CASE("what stands out by less than the least prominence is not counted") {
    std::vector<double> velocity(120, 0.0);
    for (std::size_t i = 0; i < 60; ++i) {
        const double phase = std::sin(3.14159265358979 * static_cast<double>(i) / 59.0);
        velocity[i] = 10.0 * phase * phase;
        velocity[i + 60] = 2.0 * phase * phase;
    }
    CHECK(find_submovements(velocity).count == 2);
    CHECK(find_submovements(velocity, 1.5).count == 2);
    CHECK(find_submovements(velocity, 2.5).count == 1);
}

TEST_CASE("any profile has at least one piece and an end within it") {
    std::mt19937_64 random{29};
    for (int run = 0; run < 4000; ++run) {
        const std::size_t n = 3 + random() % 40;
        const auto values = static_cast<std::int64_t>(2 + random() % 30); // few: many ties
        std::vector<double> velocity;
        std::int64_t walk = 0;
        for (std::size_t i = 0; i < n; ++i) {
            const auto step = static_cast<std::int64_t>(random() % 100) % values - values / 2;
            walk = run % 2 == 0 ? step : walk + step;
            velocity.push_back(static_cast<double>(walk));
        }
        const Submovements found = find_submovements(velocity);
        REQUIRE(found.count >= 1);
        REQUIRE(found.count <= n);
        REQUIRE(found.primary_end >= 0.0);
        REQUIRE(found.primary_end <= static_cast<double>(n - 1));
    }
}

/// A single movement as the reconstruction sees it: places with noise, low-passed at 10 Hz.
std::vector<double> noisy_velocity(std::mt19937_64& random, double noise_mm) {
    const MinimumJerk movement{200.0, 0.6, 0.5};
    std::normal_distribution<double> noise{0.0, noise_mm};
    std::vector<double> x;
    for (int i = 0; i < 320; ++i) {
        x.push_back(movement.place(i / k_rate_hz) + noise(random));
    }
    std::vector<double> y = x;
    zero_phase(LowPass::butterworth2(dual_pass_cutoff(10.0), k_rate_hz), x, y);
    std::vector<double> velocity;
    for (std::size_t i = 105; i < 216; ++i) {
        velocity.push_back((x[i + 1] - x[i - 1]) * k_rate_hz / 2.0);
    }
    return velocity;
}

TEST_CASE("noise that turns the jerk over and over does not add pieces") {
    std::mt19937_64 random{23};
    int jerk_turns = 0;
    int extra = 0;
    for (int run = 0; run < 200; ++run) {
        const std::vector<double> velocity = noisy_velocity(random, 0.2);
        extra += find_submovements(velocity).count - 1;
        for (std::size_t i = 3; i < velocity.size(); ++i) {
            const double before = velocity[i - 1] - 2.0 * velocity[i - 2] + velocity[i - 3];
            const double after = velocity[i] - 2.0 * velocity[i - 1] + velocity[i - 2];
            const bool is_falling = velocity[i - 1] < velocity[i - 2];
            jerk_turns += is_falling && before > 0.0 && after <= 0.0 ? 1 : 0;
        }
    }
    CHECK(jerk_turns > 400); // taken literally: over two false pieces a movement
    CHECK(extra <= 2);       // one in a hundred
}

} // namespace
} // namespace sagitta::estimator
