#include "estimator/deviation.hpp"
#include "estimator/turns.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <numbers>
#include <vector>

namespace sagitta::estimator {
namespace {

TEST_CASE("with no band every change of side counts and zeros are skipped") {
    CHECK(axis_crossings(std::vector<double>{1.0, -1.0, 1.0}, 0.0) == 2);
    CHECK(axis_crossings(std::vector<double>{1.0, 0.0, 1.0}, 0.0) == 0);
    CHECK(axis_crossings(std::vector<double>{1.0, 0.0, 0.0, -1e-9}, 0.0) == 1);
    CHECK(axis_crossings(std::vector<double>{0.0, 0.0}, 0.0) == 0);
    CHECK(axis_crossings(std::vector<double>{}, 0.0) == 0);
}

TEST_CASE("with no band every change of direction counts and standing still is skipped") {
    CHECK(turning_points(std::vector<double>{0.0, 1.0, 0.0, 1.0}, 0.0) == 2);
    CHECK(turning_points(std::vector<double>{0.0, 1.0, 1.0, 2.0}, 0.0) == 0);
    CHECK(turning_points(std::vector<double>{0.0, 1.0, 1.0, 0.5}, 0.0) == 1);
    CHECK(turning_points(std::vector<double>{3.0, 3.0}, 0.0) == 0);
    CHECK(turning_points(std::vector<double>{}, 0.0) == 0);
}

TEST_CASE("a crossing counts when the path leaves the band on the other side") {
    // Band 2: from beyond 1 on one side to beyond 1 on the other.
    CHECK(axis_crossings(std::vector<double>{1.5, -0.9, 1.5}, 2.0) == 0);
    CHECK(axis_crossings(std::vector<double>{1.5, -1.0, 1.5}, 2.0) == 0);
    CHECK(axis_crossings(std::vector<double>{1.5, -1.1, 1.5}, 2.0) == 2);
    CHECK(axis_crossings(std::vector<double>{0.9, -0.9, 0.9}, 2.0) == 0);
    CHECK(axis_crossings(std::vector<double>{0.9, -0.5, -1.5, 0.2, 1.2}, 2.0) == 1);
}

TEST_CASE("a turn counts when the path goes back by more than the band") {
    CHECK(turning_points(std::vector<double>{0.0, 5.0, 3.1, 9.0}, 2.0) == 0);
    CHECK(turning_points(std::vector<double>{0.0, 5.0, 3.0, 9.0}, 2.0) == 0);
    CHECK(turning_points(std::vector<double>{0.0, 5.0, 2.9, 9.0}, 2.0) == 2);
    // Backwards in small steps is backwards all the same.
    CHECK(turning_points(std::vector<double>{0.0, 5.0, 4.0, 3.5, 2.5}, 2.0) == 1);
    // Before the first way is known there is nothing to turn from.
    CHECK(turning_points(std::vector<double>{0.0, 1.5, -3.0, -1.5}, 2.0) == 0);
}

std::vector<double> bow_with_tremor(double tremor_px) {
    std::vector<double> y;
    for (int i = 0; i <= 200; ++i) {
        y.push_back(20.0 * std::sin(std::numbers::pi * i / 200.0) +
                    tremor_px * std::sin(std::numbers::pi * i / 4.0));
    }
    return y;
}

TEST_CASE("a tremor smaller than the band adds no turns, a larger one does") {
    CHECK(turning_points(bow_with_tremor(0.0), 2.0) == 1);
    CHECK(turning_points(bow_with_tremor(0.9), 2.0) == 1); // 1.8 px from peak to peak
    CHECK(turning_points(bow_with_tremor(0.9), 0.0) > 20);
    CHECK(turning_points(bow_with_tremor(4.0), 2.0) > 20);
}

TEST_CASE("more turns than the count can hold stop at its largest value") {
    std::vector<double> y;
    for (int i = 0; i < 70'000; ++i) {
        y.push_back(i % 2 == 0 ? 1.0 : -1.0);
    }
    CHECK(axis_crossings(y, 0.0) == 65535);
    CHECK(turning_points(y, 0.0) == 65535);
}

TEST_CASE("a straight path strays nowhere and a mirrored one strays to the other side") {
    const Deviation straight = deviation(std::vector<double>(10, 0.0));
    CHECK(straight.error.value() == 0.0);
    CHECK(straight.offset.value() == 0.0);
    CHECK(straight.variability.value() == 0.0);
    CHECK(straight.max_deviation.value() == 0.0);
    const Deviation left = deviation(std::vector<double>{0.0, 3.0, 5.0, 0.0});
    const Deviation right = deviation(std::vector<double>{0.0, -3.0, -5.0, 0.0});
    CHECK(left.offset.value() == 2.0);
    CHECK(right.offset.value() == -2.0);
    CHECK(right.error.value() == left.error.value());
    CHECK(right.variability.value() == left.variability.value());
    CHECK(right.max_deviation.value() == 5.0);
}

} // namespace
} // namespace sagitta::estimator
