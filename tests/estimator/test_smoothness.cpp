#include "estimator/smoothness.hpp"
#include "tests/reference/minimum_jerk.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <complex>
#include <numbers>

namespace sagitta::estimator {
namespace {

/// The published algorithm word by word, with a plain transform.
double plain_spectral_arc_length(const std::vector<double>& speed, double rate_hz) {
    const double n = static_cast<double>(speed.size());
    const double padded = std::exp2(std::ceil(std::log2(n)) + 4.0);
    std::vector<double> magnitude;
    for (int bin = 0; bin * rate_hz / padded <= 10.0; ++bin) {
        std::complex<double> sum;
        for (std::size_t i = 0; i < speed.size(); ++i) {
            const double angle = -2.0 * std::numbers::pi * bin * static_cast<double>(i) / padded;
            sum += speed[i] * std::polar(1.0, angle);
        }
        magnitude.push_back(std::abs(sum));
    }
    std::size_t last = 0;
    for (std::size_t bin = 0; bin < magnitude.size(); ++bin) {
        last = magnitude[bin] >= 0.05 * magnitude[0] ? bin : last;
    }
    double length = 0.0;
    for (std::size_t bin = 1; bin <= last; ++bin) {
        length += std::hypot(1.0 / static_cast<double>(last),
                             (magnitude[bin] - magnitude[bin - 1]) / magnitude[0]);
    }
    return -length;
}

TEST_CASE("the spectral arc length equals the plain transform's at many lengths and rates") {
    for (const double rate : {50.0, 125.0, 200.0, 203.7}) {
        for (const double until : {0.15, 0.3, 0.64, 0.8, 1.3}) {
            CAPTURE(rate);
            CAPTURE(until);
            const auto speed =
                tests::sum_of_speeds({{180.0, 0.5, -0.05}, {30.0, 0.25, 0.4}}, rate, until);
            CHECK(spectral_arc_length(speed, rate) ==
                  doctest::Approx(plain_spectral_arc_length(speed, rate)).epsilon(1e-9));
        }
    }
}

TEST_CASE("smoothness does not depend on the unit of speed") {
    auto speed = tests::sum_of_speeds({{180.0, 0.5, 0.0}, {20.0, 0.3, 0.45}}, 200.0, 0.8);
    const double arc = spectral_arc_length(speed, 200.0);
    const double jerk = log_dimensionless_jerk(speed);
    for (double& value : speed) {
        value *= 37.0;
    }
    CHECK(spectral_arc_length(speed, 200.0) == doctest::Approx(arc).epsilon(1e-12));
    CHECK(log_dimensionless_jerk(speed) == doctest::Approx(jerk).epsilon(1e-12));
}

TEST_CASE("a movement in pieces is less smooth than one in one go") {
    const auto one = tests::sum_of_speeds({{200.0, 0.6, 0.0}}, 200.0, 0.9);
    const auto two = tests::sum_of_speeds({{150.0, 0.4, 0.0}, {50.0, 0.4, 0.5}}, 200.0, 0.9);
    CHECK(spectral_arc_length(two, 200.0) < spectral_arc_length(one, 200.0));
    CHECK(log_dimensionless_jerk(two) < log_dimensionless_jerk(one));
}

TEST_CASE("the shortest profiles give numbers") {
    CHECK(std::isfinite(spectral_arc_length(std::vector<double>{1.0, 1.0}, 200.0)));
    CHECK(std::isfinite(spectral_arc_length(std::vector<double>{0.0, 2.0, 0.0}, 200.0)));
    // n = 3, peak 1, one second difference of -2: -ln(27 * 4).
    CHECK(log_dimensionless_jerk(std::vector<double>{0.0, 1.0, 0.0}) ==
          doctest::Approx(-std::log(108.0)));
}

} // namespace
} // namespace sagitta::estimator
