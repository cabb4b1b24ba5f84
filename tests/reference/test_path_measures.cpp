// Deviation, crossings and changes against a worked example and analytic limits.
// Formulas: MacKenzie, Kauppinen & Silfverberg (2001), CHI, pp. 9-16.
#include "estimator/deviation.hpp"
#include "estimator/movement.hpp"
#include "estimator/turns.hpp"
#include "tests/reference/data_file.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <numbers>

namespace sagitta::estimator {
namespace {

constexpr double k_pi = std::numbers::pi;

struct Point {
    double x, y;
};

/// Along and across the axis from `from` to `to`, + = left.
struct OnAxis {
    std::vector<double> along, across;
};

OnAxis on_axis(const std::vector<Point>& path, Point from, Point to) {
    const double length = std::hypot(to.x - from.x, to.y - from.y);
    const Point unit{(to.x - from.x) / length, (to.y - from.y) / length};
    OnAxis result;
    for (const Point& point : path) {
        const Point step{point.x - from.x, point.y - from.y};
        result.along.push_back(step.x * unit.x + step.y * unit.y);
        result.across.push_back(step.y * unit.x - step.x * unit.y);
    }
    return result;
}

std::vector<Point> example_path() {
    const tests::DataFile data{"path_example.csv"};
    std::vector<Point> path;
    for (std::size_t i = 0; i < data.rows(); ++i) {
        path.push_back({data.at("x", i), data.at("y", i)});
    }
    return path;
}

Point turned_and_shifted(Point point) {
    const double angle = 37.0 * k_pi / 180.0;
    return {point.x * std::cos(angle) - point.y * std::sin(angle) - 812.5,
            point.x * std::sin(angle) + point.y * std::cos(angle) + 41.25};
}

struct ExampleRow {
    bool to_target; // else to the end point
    int crossings;
    double variability, error, offset, largest;
};

// Source: an invented path of 15 points, measures computed with NumPy 1.24.2.
constexpr ExampleRow k_example[] = {{true, 4, 2.624518096, 2.366666667, 1.433333333, 6.0},
                                    {false, 3, 2.669399290, 2.248638559, 1.107986150, 5.849926876}};

void check_example(const std::vector<Point>& path, Point target, const ExampleRow& row,
                   double band) {
    const OnAxis placed = on_axis(path, path.front(), row.to_target ? target : path.back());
    CHECK(axis_crossings(placed.across, band) == row.crossings);
    CHECK(turning_points(placed.across, band) == 4);
    CHECK(turning_points(placed.along, band) == 1);
    const Deviation found = deviation(placed.across);
    CHECK(std::abs(found.variability.value() - row.variability) < 1e-9);
    CHECK(std::abs(found.error.value() - row.error) < 1e-9);
    CHECK(std::abs(found.offset.value() - row.offset) < 1e-9);
    CHECK(std::abs(found.max_deviation.value() - row.largest) < 1e-9);
}

TEST_CASE("the worked path gives the published measures on both task axes") {
    const std::vector<Point> path = example_path();
    REQUIRE(path.size() == 15);
    for (const ExampleRow& row : k_example) {
        check_example(path, {100.0, 0.0}, row, 0.0);
    }
}

TEST_CASE("path measures do not change when the path is turned by 37 degrees and shifted") {
    std::vector<Point> path = example_path();
    for (Point& point : path) {
        point = turned_and_shifted(point);
    }
    // Points on the axis are off it by the last bits once turned: the smallest of bands.
    for (const ExampleRow& row : k_example) {
        check_example(path, turned_and_shifted({100.0, 0.0}), row, 1e-9);
    }
}

std::vector<double> sampled(std::size_t n, double height, double half_waves) {
    std::vector<double> y(n);
    for (std::size_t i = 0; i < n; ++i) {
        const double share = static_cast<double>(i) / static_cast<double>(n - 1);
        y[i] = height * std::sin(half_waves * k_pi * share);
    }
    y.back() = 0.0; // exactly, where sin(pi) is 1e-16
    return y;
}

TEST_CASE("a half sine deviates by its analytic limits") {
    // Analytic: ME = MO = 2h/pi, MV = h sqrt(1/2 - 4/pi^2), largest h.
    const double h = 5.0;
    const Deviation found = deviation(sampled(100001, h, 1.0));
    CHECK(found.error.value() == doctest::Approx(2.0 * h / k_pi).epsilon(2e-5));
    CHECK(found.offset.value() == doctest::Approx(2.0 * h / k_pi).epsilon(2e-5));
    CHECK(found.variability.value() == doctest::Approx(0.307758453 * h).epsilon(2e-5));
    CHECK(found.max_deviation.value() == doctest::Approx(h).epsilon(1e-9));
    CHECK(axis_crossings(sampled(100001, h, 1.0), 0.0) == 0);
    CHECK(turning_points(sampled(100001, h, 1.0), 0.0) == 1);
}

TEST_CASE("a full sine crosses once, turns twice and has no offset") {
    // Analytic: TAC 1, MDC 2, MO 0, MV = h / sqrt(2), ME = 2h/pi.
    const double h = 5.0;
    const std::vector<double> y = sampled(100001, h, 2.0);
    const Deviation found = deviation(y);
    CHECK(axis_crossings(y, 0.0) == 1);
    CHECK(turning_points(y, 0.0) == 2);
    CHECK(std::abs(found.offset.value()) < 1e-9);
    CHECK(found.variability.value() == doctest::Approx(h / std::numbers::sqrt2).epsilon(2e-5));
    CHECK(found.error.value() == doctest::Approx(2.0 * h / k_pi).epsilon(2e-5));
}

struct ArcRow {
    double angle_deg, path_ratio, sagitta_share;
};

// Analytic, arc of turning angle a: L/D = (a/2) / sin(a/2), sagitta/D = (1 - cos(a/2)) /
// (2 sin(a/2)), initial direction error a/2.
constexpr ArcRow k_arcs[] = {{10.0, 1.001270368, .021830471},
                             {20.0, 1.005095058, .043744332},
                             {30.0, 1.011515160, .065826249},
                             {60.0, 1.047197551, .133974596}};

TEST_CASE("an arc's sagitta and length ratio are the analytic ones") {
    for (const ArcRow& row : k_arcs) {
        CAPTURE(row.angle_deg);
        const double half = row.angle_deg * k_pi / 360.0;
        const std::size_t n = 2001;
        std::vector<Point> path;
        double length = 0.0;
        for (std::size_t i = 0; i < n; ++i) {
            const double share = 2.0 * static_cast<double>(i) / static_cast<double>(n - 1) - 1.0;
            path.push_back({std::sin(half * share), std::cos(half * share)});
            if (i > 0) {
                length += std::hypot(path[i].x - path[i - 1].x, path[i].y - path[i - 1].y);
            }
        }
        const double distance = 2.0 * std::sin(half);
        const Deviation found = deviation(on_axis(path, path.front(), path.back()).across);
        CHECK(found.max_deviation.value() / distance ==
              doctest::Approx(row.sagitta_share).epsilon(1e-7));
        CHECK(found.offset.value() > 0.0); // left of the axis
        Scores scores;
        scores.path = Pixels::of(length);
        scores.distance = Pixels::of(distance);
        CHECK(scores.path_ratio() == doctest::Approx(row.path_ratio).epsilon(1e-7));
    }
}

} // namespace
} // namespace sagitta::estimator
