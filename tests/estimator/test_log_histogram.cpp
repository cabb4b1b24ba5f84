#include "estimator/log_histogram.hpp"

#include <doctest/doctest.h>

#include <algorithm>
#include <cmath>
#include <limits>
#include <random>
#include <vector>

namespace sagitta::estimator {
namespace {

// One bin, as a ratio.
const double k_bin_ratio = std::exp2(1.0 / LogHistogram::k_bins_per_octave);

double exact_quantile(const std::vector<double>& sorted, double p) {
    const auto last = static_cast<double>(sorted.size() - 1);
    return sorted[static_cast<std::size_t>(std::lround(p * last))];
}

TEST_CASE("quantiles of log-normal values are exact within a bin") {
    std::mt19937_64 random{3};
    for (const double median : {30.0, 200.0, 900.0}) {
        CAPTURE(median);
        std::lognormal_distribution<double> spread{std::log(median), 0.8};
        LogHistogram histogram;
        std::vector<double> values;
        for (int i = 0; i < 5000; ++i) {
            values.push_back(spread(random));
            histogram.add(values.back());
        }
        std::sort(values.begin(), values.end());
        REQUIRE(histogram.count() == 5000);
        for (const double p : {0.01, 0.05, 0.25, 0.5, 0.75, 0.95, 0.99}) {
            CAPTURE(p);
            const double ratio = histogram.quantile(p) / exact_quantile(values, p);
            CHECK(ratio < k_bin_ratio);
            CHECK(ratio > 1.0 / k_bin_ratio);
        }
    }
}

TEST_CASE("a value on a bin's lower edge counts in that bin, one below in the bin before") {
    LogHistogram histogram;
    histogram.add(2.0);
    histogram.add(std::nextafter(2.0, 0.0) * (1.0 - 1e-12));
    CHECK(histogram.bins[8] == 1);
    CHECK(histogram.bins[7] == 1);
}

TEST_CASE("values beyond the ends count in the first and the last bin") {
    constexpr double infinite = std::numeric_limits<double>::infinity();
    LogHistogram histogram;
    for (const double value : {-infinite, -3.0, 0.0, 0.5, 1.0}) {
        histogram.add(value);
    }
    histogram.add(std::numeric_limits<double>::quiet_NaN());
    CHECK(histogram.bins.front() == 6);
    for (const double value : {65535.0, 65536.0, 1e300, infinite}) {
        histogram.add(value);
    }
    CHECK(histogram.bins.back() == 4);
    CHECK(histogram.count() == 10);
    CHECK(histogram.quantile(1.0) == doctest::Approx(65536.0));
    CHECK(histogram.quantile(0.0) == doctest::Approx(1.0));
}

TEST_CASE("a quantile is interpolated within its bin on the log scale") {
    LogHistogram histogram;
    for (int i = 0; i < 4; ++i) {
        histogram.add(16.5); // bin 32, from 16 to 17.45
    }
    CHECK(histogram.quantile(0.0) == doctest::Approx(16.0));
    CHECK(histogram.quantile(0.5) == doctest::Approx(16.0 * std::exp2(0.5 / 8.0)));
    CHECK(histogram.quantile(1.0) == doctest::Approx(16.0 * std::exp2(1.0 / 8.0)));
}

TEST_CASE("an empty bin between two filled ones is not where a quantile ends") {
    LogHistogram histogram;
    histogram.add(16.5);
    histogram.add(1000.0);
    CHECK(histogram.quantile(0.5) < 17.5);
    CHECK(histogram.quantile(0.51) > 900.0);
}

TEST_CASE("merged histograms count as one") {
    std::mt19937_64 random{5};
    std::lognormal_distribution<double> spread{5.0, 1.0};
    LogHistogram whole;
    LogHistogram first;
    LogHistogram second;
    for (int i = 0; i < 1000; ++i) {
        const double value = spread(random);
        whole.add(value);
        (i % 3 == 0 ? first : second).add(value);
    }
    first.merge(second);
    CHECK(first.bins == whole.bins);
    CHECK(first.quantile(0.3) == whole.quantile(0.3));
}

} // namespace
} // namespace sagitta::estimator
