// Lines and intervals: what they refuse, and truth recovered from seeded simulations.
#include "estimator/interval.hpp"
#include "estimator/regression.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <limits>
#include <random>
#include <vector>

namespace sagitta::estimator {
namespace {

TEST_CASE("a line through points on a line is that line, without error") {
    const std::vector<double> x = {1.0, 2.0, 4.0, 8.0};
    std::vector<double> y;
    for (const double value : x) {
        y.push_back(3.0 - 2.0 * value);
    }
    const auto line = fit_line(x, y);
    REQUIRE(line.has_value());
    CHECK(line->slope == doctest::Approx(-2.0));
    CHECK(line->intercept == doctest::Approx(3.0));
    CHECK(std::abs(line->residual_sd) < 1e-12);
    CHECK(line->r == doctest::Approx(-1.0));
}

TEST_CASE("a line through level points has slope and correlation 0") {
    const auto line = fit_line(std::vector<double>{1.0, 2.0, 3.0}, std::vector<double>(3, 7.0));
    REQUIRE(line.has_value());
    CHECK(line->slope == 0.0);
    CHECK(line->r == 0.0);
}

TEST_CASE("a line needs three points that vary and are numbers") {
    const auto few = fit_line(std::vector<double>{1.0, 2.0}, std::vector<double>{1.0, 2.0});
    REQUIRE_FALSE(few.has_value());
    CHECK(few.error().code == ErrorCode::too_few);
    const auto constant = fit_line(std::vector<double>(5, 2.0), std::vector<double>(5, 1.0));
    REQUIRE_FALSE(constant.has_value());
    CHECK(constant.error().code == ErrorCode::bad_value);
    const double infinite = std::numeric_limits<double>::infinity();
    const auto broken =
        fit_line(std::vector<double>{1.0, 2.0, 3.0}, std::vector<double>{1.0, infinite, 3.0});
    REQUIRE_FALSE(broken.has_value());
    CHECK(broken.error().code == ErrorCode::bad_value);
    CHECK(fit_line(PairMoments{}).error().code == ErrorCode::too_few);
}

TEST_CASE("intervals need two values, finite, and a confidence between 0 and 1") {
    const std::vector<double> good = {1.0, 2.0};
    const std::vector<double> one = {1.0};
    const std::vector<double> broken = {1.0, std::nan("")};
    CHECK(mean_interval(one, 0.95).error().code == ErrorCode::too_few);
    CHECK(mean_interval(broken, 0.95).error().code == ErrorCode::bad_value);
    for (const double confidence : {0.0, 1.0, 95.0, std::nan("")}) {
        CHECK(mean_interval(good, confidence).error().code == ErrorCode::bad_value);
    }
    CHECK(difference_interval(good, one, 0.95).error().code == ErrorCode::too_few);
    CHECK(difference_interval(one, good, 0.95).error().code == ErrorCode::too_few);
}

TEST_CASE("values without spread have an interval of no width") {
    const std::vector<double> threes(4, 3.0);
    const std::vector<double> fives(6, 5.0);
    const auto mean = mean_interval(threes, 0.95);
    REQUIRE(mean.has_value());
    CHECK(mean->low == 3.0);
    CHECK(mean->high == 3.0);
    const auto difference = difference_interval(threes, fives, 0.95);
    REQUIRE(difference.has_value());
    CHECK(difference->low == -2.0);
    CHECK(difference->high == -2.0);
    CHECK(difference->df == 8.0);
}

TEST_CASE("95 percent intervals cover the truth in 95 percent of simulations") {
    // 4000 runs: the standard error of the coverage is 0.34 %, the tolerance about three of it.
    constexpr int runs = 4000;
    std::mt19937_64 random{41};
    std::normal_distribution<double> first{10.0, 1.0};
    std::normal_distribution<double> second{9.0, 3.0};
    int mean_covers = 0;
    int difference_covers = 0;
    for (int run = 0; run < runs; ++run) {
        std::vector<double> a;
        std::vector<double> b;
        for (int day = 0; day < 8; ++day) {
            a.push_back(first(random));
        }
        for (int day = 0; day < 12; ++day) {
            b.push_back(second(random));
        }
        const auto mean = mean_interval(a, 0.95);
        const auto difference = difference_interval(a, b, 0.95);
        REQUIRE(mean.has_value());
        REQUIRE(difference.has_value());
        mean_covers += mean->low <= 10.0 && 10.0 <= mean->high ? 1 : 0;
        difference_covers += difference->low <= 1.0 && 1.0 <= difference->high ? 1 : 0;
    }
    CHECK(std::abs(mean_covers / static_cast<double>(runs) - 0.95) < 0.0105);
    CHECK(std::abs(difference_covers / static_cast<double>(runs) - 0.95) < 0.0105);
}

} // namespace
} // namespace sagitta::estimator
