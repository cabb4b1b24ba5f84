#include "estimator/butterworth.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <numbers>
#include <vector>

namespace sagitta::estimator {
namespace {

constexpr double k_rate_hz = 200.0;

double one_pass_gain(const LowPass& filter, double frequency_hz, double rate_hz) {
    const double angle = 2.0 * std::numbers::pi * frequency_hz / rate_hz;
    const std::complex<double> z = std::polar(1.0, -angle);
    return std::abs((filter.b0 + filter.b1 * z + filter.b2 * z * z) /
                    (1.0 + filter.a1 * z + filter.a2 * z * z));
}

TEST_CASE("one pass has a gain of 1 at rest, -3 dB at the cutoff and none at half the rate") {
    for (const double cutoff : {2.0, 7.0, 10.0, 40.0, 90.0}) {
        CAPTURE(cutoff);
        const LowPass filter = LowPass::butterworth2(cutoff, k_rate_hz);
        CHECK(one_pass_gain(filter, 0.0, k_rate_hz) == doctest::Approx(1.0).epsilon(1e-12));
        CHECK(one_pass_gain(filter, cutoff, k_rate_hz) ==
              doctest::Approx(std::numbers::sqrt2 / 2.0).epsilon(1e-10));
        CHECK(std::abs(one_pass_gain(filter, k_rate_hz / 2.0, k_rate_hz)) < 1e-10);
    }
}

TEST_CASE("two passes at the dual-pass cutoff have -3 dB at the cutoff asked for") {
    // The bilinear transform moves the point a little: by less than 1 % at a twentieth of the
    // rate, by nothing as the rate grows.
    const auto both = [](double rate_hz) {
        const LowPass filter = LowPass::butterworth2(dual_pass_cutoff(10.0), rate_hz);
        const double gain = one_pass_gain(filter, 10.0, rate_hz);
        return gain * gain;
    };
    CHECK(both(k_rate_hz) == doctest::Approx(std::numbers::sqrt2 / 2.0).epsilon(0.01));
    CHECK(both(20000.0) == doctest::Approx(std::numbers::sqrt2 / 2.0).epsilon(1e-5));
}

std::vector<double> sine(std::size_t n, double frequency_hz, double phase) {
    std::vector<double> values(n);
    for (std::size_t i = 0; i < n; ++i) {
        const double time = static_cast<double>(i) / k_rate_hz;
        values[i] = std::sin(2.0 * std::numbers::pi * frequency_hz * time + phase);
    }
    return values;
}

TEST_CASE("a sine keeps its phase and loses the squared gain, on both coordinates") {
    const LowPass filter = LowPass::butterworth2(dual_pass_cutoff(10.0), k_rate_hz);
    for (const double frequency : {1.0, 5.0, 10.0, 20.0}) {
        CAPTURE(frequency);
        const std::vector<double> x = sine(2000, frequency, 0.0);
        const std::vector<double> y = sine(2000, frequency, 1.1);
        std::vector<double> filtered_x = x;
        std::vector<double> filtered_y = y;
        zero_phase(filter, filtered_x, filtered_y);
        const double gain = std::pow(one_pass_gain(filter, frequency, k_rate_hz), 2.0);
        double worst = 0.0;
        for (std::size_t i = 500; i < 1500; ++i) { // far from the ends
            worst = std::max({worst, std::abs(filtered_x[i] - gain * x[i]),
                              std::abs(filtered_y[i] - gain * y[i])});
        }
        CHECK(worst < 1e-9);
    }
}

TEST_CASE("what stands still stays where it is, from the first sample to the last") {
    const LowPass filter = LowPass::butterworth2(12.5, k_rate_hz);
    std::vector<double> x(50, 812.25);
    std::vector<double> y(50, -3.0);
    zero_phase(filter, x, y);
    for (std::size_t i = 0; i < x.size(); ++i) {
        CHECK(x[i] == doctest::Approx(812.25).epsilon(1e-12));
        CHECK(y[i] == doctest::Approx(-3.0).epsilon(1e-12));
    }
}

TEST_CASE("a step between two rests keeps its middle and mirrors about it") {
    const LowPass filter = LowPass::butterworth2(dual_pass_cutoff(10.0), k_rate_hz);
    const std::size_t n = 400;
    std::vector<double> x(n, 0.0);
    std::vector<double> y(n, 0.0);
    std::fill(x.begin() + 200, x.end(), 1.0);
    std::fill(y.begin() + 200, y.end(), -7.0);
    zero_phase(filter, x, y);
    for (std::size_t i = 0; i < n; ++i) {
        CHECK(std::abs(x[i] + x[n - 1 - i] - 1.0) < 1e-9);
        CHECK(std::abs(y[i] + 7.0 * x[i]) < 1e-9); // the coordinates do not touch one another
    }
    CHECK(std::abs(x.front()) < 1e-9);
    CHECK(std::abs(x.back() - 1.0) < 1e-9);
}

TEST_CASE("filtering nothing or one sample is allowed") {
    const LowPass filter = LowPass::butterworth2(12.5, k_rate_hz);
    std::vector<double> none;
    zero_phase(filter, none, none);
    std::vector<double> x{4.0};
    std::vector<double> y{5.0};
    zero_phase(filter, x, y);
    CHECK(x[0] == doctest::Approx(4.0));
    CHECK(y[0] == doctest::Approx(5.0));
}

} // namespace
} // namespace sagitta::estimator
