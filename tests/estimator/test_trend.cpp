#include "estimator/hand/random.hpp"
#include "estimator/trend.hpp"

#include <cmath>
#include <doctest/doctest.h>
#include <vector>

namespace sagitta::estimator {
namespace {

std::vector<double> counted(std::size_t n) {
    std::vector<double> x(n);
    for (std::size_t i = 0; i < n; ++i) {
        x[i] = static_cast<double>(i);
    }
    return x;
}

TEST_CASE("a straight line has its own slope and intercept, whatever the gaps between days") {
    const std::vector<double> x = {0, 1, 2, 3, 4, 7, 8, 9, 10, 11, 14};
    std::vector<double> y;
    for (const double day : x) {
        y.push_back(3.0 - 0.25 * day);
    }
    const TheilSenLine line = theil_sen(x, y, 0.95).value();
    CHECK(line.slope == doctest::Approx(-0.25));
    CHECK(line.low == doctest::Approx(-0.25));
    CHECK(line.high == doctest::Approx(-0.25));
    CHECK(line.intercept == doctest::Approx(3.0));
    CHECK(mann_kendall(y)->s == -55);
    CHECK(mann_kendall(y)->z < 0.0);
}

TEST_CASE("two wild days among twenty do not move the slope") {
    const std::vector<double> x = counted(20);
    std::vector<double> y;
    for (const double day : x) {
        y.push_back(1.0 + 0.1 * day);
    }
    y[3] = 500.0;
    y[17] = -500.0;
    CHECK(theil_sen(x, y, 0.95)->slope == doctest::Approx(0.1));
}

TEST_CASE("the interval covers the true slope and the test cries wolf as often as they promise") {
    constexpr int k_series = 1500;
    hand::Random random{42};
    const std::vector<double> x = counted(25);
    int covered = 0;
    int false_alarms = 0;
    for (int i = 0; i < k_series; ++i) {
        std::vector<double> y(x.size());
        for (double& value : y) {
            value = random.normal();
        }
        const TheilSenLine line = theil_sen(x, y, 0.95).value();
        covered += line.low <= 0.0 && line.high >= 0.0 ? 1 : 0;
        false_alarms += mann_kendall(y)->p < 0.05 ? 1 : 0;
    }
    CHECK(covered > 0.935 * k_series);
    CHECK(covered < 0.970 * k_series);
    CHECK(false_alarms < 0.065 * k_series);
    CHECK(false_alarms > 0.030 * k_series);
}

TEST_CASE("values that are all equal show no trend") {
    const std::vector<double> y(12, 4.0);
    const MannKendallTest test = mann_kendall(y).value();
    CHECK(test.s == 0);
    CHECK(test.variance == 0.0);
    CHECK(test.z == 0.0);
    CHECK(test.p == 1.0);
    CHECK(theil_sen(counted(12), y, 0.95)->slope == 0.0);
}

TEST_CASE("a trend refuses few values, places out of order and what is not a number") {
    const std::vector<double> y = counted(12);
    CHECK(theil_sen(counted(9), counted(9), 0.95).error().code == ErrorCode::too_few);
    CHECK(mann_kendall(counted(9)).error().code == ErrorCode::too_few);
    CHECK(theil_sen(counted(11), y, 0.95).error().code == ErrorCode::bad_value);
    CHECK(theil_sen(y, y, 1.0).error().code == ErrorCode::bad_value);
    std::vector<double> twice = y;
    twice[5] = twice[4];
    CHECK(theil_sen(twice, y, 0.95).error().code == ErrorCode::bad_value);
    std::vector<double> broken = y;
    broken[5] = std::nan("");
    CHECK(theil_sen(broken, y, 0.95).error().code == ErrorCode::bad_value);
    CHECK(theil_sen(y, broken, 0.95).error().code == ErrorCode::bad_value);
    CHECK(mann_kendall(broken).error().code == ErrorCode::bad_value);
}

} // namespace
} // namespace sagitta::estimator
