// Smoothness, submovements and the low-pass filter against published and computed values.
#include "estimator/butterworth.hpp"
#include "estimator/smoothness.hpp"
#include "estimator/submovements.hpp"
#include "tests/reference/data_file.hpp"
#include "tests/reference/minimum_jerk.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <cmath>

namespace sagitta::estimator {
namespace {

using tests::MinimumJerk;

TEST_CASE("smoothness of exp(-5 t^2) matches the published docstrings") {
    // Source: the docstrings of the authors' published script smoothness.py (Balasubramanian et
    // al. 2015): SPARC -1.41403, dimensionless jerk -335.74684, its log -5.81636; the twelve
    // digits recomputed with NumPy 1.24.2.
    std::vector<double> speed;
    for (int i = 0; i < 200; ++i) {
        const double t = -1.0 + 0.01 * i;
        speed.push_back(std::exp(-5.0 * t * t));
    }
    CHECK(std::abs(spectral_arc_length(speed, 100.0) - -1.41403) < 5e-6);
    CHECK(std::abs(spectral_arc_length(speed, 100.0) - -1.414031261710) < 1e-10);
    const double log_jerk = log_dimensionless_jerk(speed);
    CHECK(std::abs(log_jerk - -5.81636) < 5e-6);
    CHECK(std::abs(std::exp(-log_jerk) - 335.74684) < 5e-6);
}

TEST_CASE("smoothness of minimum-jerk movements and their sums matches the computed table") {
    // Source: the authors' published algorithm run on minimum-jerk speeds with NumPy 1.24.2; rate,
    // number of samples, SPARC and LDLJ stand in the file.
    const tests::DataFile data{"sparc_reference.csv"};
    REQUIRE(data.rows() == 37);
    for (std::size_t row = 0; row < data.rows(); ++row) {
        CAPTURE(row);
        const double rate = data.at("fs_hz", row);
        const auto pieces = static_cast<int>(data.at("n_sub", row));
        std::vector<MinimumJerk> movements;
        for (int piece = 0; piece < pieces; ++piece) {
            movements.push_back(
                {1.0, data.at("sub_T_s", row), data.at("onset_gap_s", row) * piece});
        }
        // The table's number of samples rounds half to even, which lround does not.
        const auto samples = static_cast<std::size_t>(data.at("N", row));
        const double until = (static_cast<double>(samples) - 1.0) / rate;
        const auto speed = tests::sum_of_speeds(movements, rate, until);
        REQUIRE(speed.size() == samples);
        CHECK(std::abs(spectral_arc_length(speed, rate) - data.at("SPARC", row)) < 1e-6);
        const double log_jerk = data.at("LDLJ_disc", row);
        if (!std::isnan(log_jerk)) {
            CHECK(std::abs(log_dimensionless_jerk(speed) - log_jerk) < 1e-6);
        }
    }
}

TEST_CASE("dimensionless jerk of a minimum-jerk movement tends to its analytic value") {
    // Analytic, Flash & Hogan (1985) with peak-speed normalisation: -ln 204.8.
    const auto speed = tests::sum_of_speeds({{300.0, 0.5, 0.0}}, 20000.0, 0.5);
    CHECK(log_dimensionless_jerk(speed) == doctest::Approx(-5.322033893).epsilon(1e-3));
}

// 180 mm in .5 s, and a correction of 20 mm in .3 s that begins at .45 s.
const std::vector<MinimumJerk> k_pair = {{180.0, 0.5, 0.0}, {20.0, 0.3, 0.45}};

TEST_CASE("smoothness of a primary and a corrective movement matches at two rates") {
    // Source: the authors' published algorithm, run with NumPy 1.24.2.
    CHECK(std::abs(spectral_arc_length(tests::sum_of_speeds(k_pair, 1000.0, 0.8), 1000.0) -
                   -1.484700) < 1e-6);
    CHECK(std::abs(spectral_arc_length(tests::sum_of_speeds(k_pair, 125.0, 0.8), 125.0) -
                   -1.484701) < 1e-6);
}

double place_of_pair(double time_s) {
    return k_pair[0].place(time_s) + k_pair[1].place(time_s);
}

void check_pair(double rate_hz, double tolerance_s) {
    CAPTURE(rate_hz);
    const auto speed = tests::sum_of_speeds(k_pair, rate_hz, 0.8);
    const Submovements found = find_submovements(speed);
    CHECK(found.count == 2);
    const double end_s = found.primary_end / rate_hz;
    CHECK(std::abs(end_s - 0.486449) < tolerance_s);
    CHECK(place_of_pair(end_s) / 200.0 == doctest::Approx(0.901311).epsilon(1e-4));
}

TEST_CASE("the primary movement of a pair ends where the acceleration turns positive") {
    // Source: criterion 2 of Meyer et al. (1988) on the pair, root found with SciPy 1.10.1:
    // .486449 s, .901311 of the distance; second peak 125 mm/s at .600 s.
    check_pair(1000.0, 1e-6);
    check_pair(200.0, 2e-5);
    check_pair(125.0, 1e-4);
    const auto speed = tests::sum_of_speeds(k_pair, 1000.0, 0.8);
    const auto second = std::max_element(speed.begin() + 490, speed.end());
    CHECK(second - speed.begin() == 600);
    CHECK(*second == doctest::Approx(125.0).epsilon(1e-9));
}

struct CoefficientRow {
    double rate_hz, cutoff_hz, b0, a1, a2;
};

// Source: scipy.signal.butter(2, ...), SciPy 1.10.1; b1 = 2 b0, b2 = b0.
constexpr CoefficientRow k_coefficients[] = {
    {1000.0, 10.0, .00094469184384, -1.91119706743, .914975834801},
    {125.0, 10.0, .0461318020933, -1.30728502885, .491812237223},
    {125.0, 7.0, .0246306080491, -1.50958325919, .608105691389},
    {1000.0, 7.0, .000468952844494, -1.93781878375, .939694595125}};

TEST_CASE("low-pass coefficients match SciPy's") {
    for (const CoefficientRow& row : k_coefficients) {
        CAPTURE(row.rate_hz);
        CAPTURE(row.cutoff_hz);
        const LowPass filter = LowPass::butterworth2(row.cutoff_hz, row.rate_hz);
        CHECK(std::abs(filter.b0 - row.b0) < 1e-10);
        CHECK(std::abs(filter.b1 - 2.0 * row.b0) < 1e-10);
        CHECK(std::abs(filter.b2 - row.b0) < 1e-10);
        CHECK(std::abs(filter.a1 - row.a1) < 1e-10);
        CHECK(std::abs(filter.a2 - row.a2) < 1e-10);
    }
}

TEST_CASE("the dual-pass cutoff divides by 0.802243263") {
    CHECK(std::abs(10.0 / dual_pass_cutoff(10.0) - 0.802243263) < 1e-9);
}

} // namespace
} // namespace sagitta::estimator
