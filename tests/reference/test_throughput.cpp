// Throughput and the index of difficulty against published and worked values.
#include "estimator/regression.hpp"
#include "estimator/throughput.hpp"
#include "tests/reference/data_file.hpp"

#include <doctest/doctest.h>

#include <cmath>

namespace sagitta::estimator {
namespace {

struct FittsRow {
    DifficultyForm form;
    const char* column; // the file's own index, six decimals
    double intercept, slope, r, intercept_se, slope_se, residual_sd;
};

// Source: Fitts (1954), table 1, reciprocal tapping with the 1-oz stylus, data from memory; its
// published line is 12.8 + 94.7 ID, r = .983 (from memory). The digits here and the other two
// forms: least squares over the 16 means computed with SciPy 1.10.1.
constexpr FittsRow k_fitts[] = {{DifficultyForm::fitts, "ID_fitts", 12.800000, 94.675000, .983051,
                                 20.296500, 4.718840, 29.844568},
                                {DifficultyForm::welford, "ID_welford", 65.355184, 103.790119,
                                 .990037, 13.657570, 3.945199, 22.922056},
                                {DifficultyForm::shannon, "ID_shannon", 27.689101, 111.536522,
                                 .993639, 11.934780, 3.378414, 18.332159}};

TEST_CASE("three forms of the index of difficulty give the published lines of Fitts 1954") {
    const tests::DataFile data{"fitts1954_1oz.csv"};
    REQUIRE(data.rows() == 16);
    for (const FittsRow& row : k_fitts) {
        CAPTURE(row.column);
        std::vector<double> difficulty;
        for (std::size_t i = 0; i < data.rows(); ++i) {
            const double in_widths = data.at("A_in", i) / data.at("W_in", i);
            difficulty.push_back(index_of_difficulty(row.form, in_widths).value());
            CHECK(difficulty.back() == doctest::Approx(data.at(row.column, i)).epsilon(1e-6));
        }
        const auto line = fit_line(difficulty, data.column("MT_ms"));
        REQUIRE(line.has_value());
        CHECK(std::abs(line->intercept - row.intercept) < 1e-6);
        CHECK(std::abs(line->slope - row.slope) < 1e-6);
        CHECK(std::abs(line->r - row.r) < 1e-6);
        CHECK(std::abs(line->intercept_se - row.intercept_se) < 1e-6);
        CHECK(std::abs(line->slope_se - row.slope_se) < 1e-6);
        CHECK(std::abs(line->residual_sd - row.residual_sd) < 1e-6);
    }
}

struct ThroughputRow {
    double participant, condition;
    double distance, spread, width, difficulty, time_ms, throughput;
};

// Source: invented trials, worked with NumPy 1.24.2 by the procedure of ISO 9241-411:2012 and
// Soukoreff & MacKenzie (2004), factor 4.133.
constexpr ThroughputRow k_throughput[] = {
    {1, 1, 199.098502757, 1.418539815, 5.862825053, 5.127611909, 631.5, 8.119733823},
    {1, 2, 400.628986029, 6.390342480, 26.411285469, 4.015145702, 781.5, 5.137742421},
    {2, 1, 201.926929881, 5.132522284, 21.212714598, 3.394945695, 671.5, 5.055764252},
    {2, 2, 401.921879248, 4.255619444, 17.588475160, 4.576004102, 821.5, 5.570303228}};

std::vector<TargetTrial> trials_of(const tests::DataFile& data, double participant,
                                   double condition) {
    std::vector<TargetTrial> trials;
    for (std::size_t i = 0; i < data.rows(); ++i) {
        if (data.at("participant", i) == participant && data.at("condition", i) == condition) {
            trials.push_back({data.at("from_x", i), data.at("from_y", i), data.at("to_x", i),
                              data.at("to_y", i), data.at("sel_x", i), data.at("sel_y", i),
                              data.at("mt_ms", i) * 1e-3});
        }
    }
    return trials;
}

TEST_CASE("effective throughput matches the worked example to nine decimals") {
    const tests::DataFile data{"iso_tp_example.csv"};
    double sum = 0.0;
    for (const ThroughputRow& row : k_throughput) {
        CAPTURE(row.participant);
        CAPTURE(row.condition);
        const auto trials = trials_of(data, row.participant, row.condition);
        REQUIRE(trials.size() == 8);
        const auto found = effective_throughput(trials);
        REQUIRE(found.has_value());
        CHECK(std::abs(found->effective_distance - row.distance) < 1e-9);
        CHECK(std::abs(found->spread - row.spread) < 1e-9);
        CHECK(std::abs(found->effective_width - row.width) < 1e-9);
        CHECK(std::abs(found->difficulty.value() - row.difficulty) < 1e-9);
        CHECK(std::abs(found->mean_movement_time_s * 1e3 - row.time_ms) < 1e-9);
        CHECK(std::abs(found->throughput.value() - row.throughput) < 1e-9);
        sum += found->throughput.value();
    }
    CHECK(std::abs(sum / 4.0 - 5.970885931) < 1e-9); // mean of means, equal numbers of conditions
}

} // namespace
} // namespace sagitta::estimator
