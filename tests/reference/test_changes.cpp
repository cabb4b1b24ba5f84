// Charts and trends against published and recomputed values.
#include "estimator/ewma.hpp"
#include "estimator/trend.hpp"
#include "tests/reference/data_file.hpp"

#include <cmath>
#include <doctest/doctest.h>

namespace sagitta::estimator {
namespace {

TEST_CASE("the chart gives NIST's EWMA example, and exact limits from the first value on") {
    // Source: NIST/SEMATECH e-Handbook, 6.3.2.4: EWMA0 50, s 2.0539, lambda .3, L 3, printed limits
    // 52.5884 and 47.4115 (unrounded 47.4116); further digits and the limits of each value
    // computed.
    const tests::DataFile data{"nist_ewma.csv"};
    REQUIRE(data.rows() == 20);
    auto chart = EwmaChart::start({50.0, 2.0539, 0}, {0.3, 3.0}).value();
    EwmaPoint point{};
    for (std::size_t i = 0; i < data.rows(); ++i) {
        CAPTURE(i);
        point = chart.add(data.at("y", i));
        CHECK(std::abs(point.statistic - data.at("ewma_exact", i)) < 1e-9);
        CHECK(std::abs(point.statistic - data.at("ewma_printed", i)) < 0.005 + 1e-9);
        CHECK(std::abs(point.lower - data.at("lcl_exact_t", i)) < 1e-9);
        CHECK(std::abs(point.upper - data.at("ucl_exact_t", i)) < 1e-9);
        CHECK(point.signal == EwmaSignal::none);
    }
    CHECK(std::abs(point.statistic - 51.9882432586) < 1e-9);
    for (int i = 0; i < 100; ++i) {
        point = chart.add(50.0);
    }
    CHECK(std::abs(point.upper - 52.588431738) < 1e-9);
    CHECK(std::abs(point.lower - 47.411568262) < 1e-9);
    CHECK(std::abs(point.upper - 52.5884) < 1e-4);
    CHECK(std::abs(point.lower - 47.4115) < 1e-4);
}

TEST_CASE("slope, interval and rank test of a short series are those of two other programs") {
    // Source: computed, scipy.stats.theilslopes and R trend::mk.test agree.
    const std::vector<double> x = {0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11};
    const std::vector<double> y = {10.2, 10.6, 10.1, 11.0, 11.4, 10.9,
                                   11.8, 11.8, 12.3, 11.9, 12.7, 12.5};
    const TheilSenLine line = theil_sen(x, y, 0.95).value();
    CHECK(std::abs(line.slope - .236666667) < 1e-9);
    CHECK(std::abs(line.low - .175) < 1e-9);
    CHECK(std::abs(line.high - .266666667) < 1e-9);
    CHECK(std::abs(line.intercept - 10.298333333) < 1e-9);
    const MannKendallTest test = mann_kendall(y).value();
    CHECK(test.s == 53);
    CHECK(std::abs(test.variance - 211.666667) < 1e-6);
    CHECK(std::abs(test.z - 3.574185662) < 1e-9);
    CHECK(std::abs(test.p - 3.513196e-4) < 1e-10);
}

TEST_CASE("slope and rank test of the Nile's yearly flow are those of two other programs") {
    // Source: data, flow of the Nile at Aswan 1871 to 1970, R datasets::Nile; computed as above.
    const tests::DataFile data{"nile.csv"};
    REQUIRE(data.rows() == 100);
    const TheilSenLine line = theil_sen(data.column("year"), data.column("flow"), 0.95).value();
    CHECK(std::abs(line.slope - -2.6) < 1e-9);
    CHECK(line.low < -2.6);
    CHECK(line.high < 0.0);
    const MannKendallTest test = mann_kendall(data.column("flow")).value();
    CHECK(test.s == -1387);
    CHECK(std::abs(test.variance - 112728.3333) < 1e-4);
    CHECK(std::abs(test.z - -4.128066523) < 1e-9);
    CHECK(std::abs(test.p - 3.658263e-5) < 1e-11);
}

} // namespace
} // namespace sagitta::estimator
