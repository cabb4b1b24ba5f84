#include "estimator/throughput.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <vector>

namespace sagitta::estimator {
namespace {

TEST_CASE("the index of difficulty has its three forms") {
    CHECK(index_of_difficulty(DifficultyForm::fitts, 8.0).value() == doctest::Approx(4.0));
    CHECK(index_of_difficulty(DifficultyForm::welford, 7.5).value() == doctest::Approx(3.0));
    CHECK(index_of_difficulty(DifficultyForm::shannon, 15.0).value() == doctest::Approx(4.0));
}

TEST_CASE("implied throughput is bits over seconds, and nothing without movement time") {
    const auto found = implied_throughput(Bits::of(35.0), Micros{10'000'000});
    REQUIRE(found.has_value());
    CHECK(found->value() == doctest::Approx(3.5));
    const auto none = implied_throughput(Bits::of(0.0), Micros{0});
    REQUIRE_FALSE(none.has_value());
    CHECK(none.error().code == ErrorCode::too_few);
}

TEST_CASE("effective throughput refuses trials that cannot give it") {
    const TargetTrial trial{0.0, 0.0, 100.0, 0.0, 101.0, 0.0, 0.5};
    TargetTrial other = trial;
    other.pressed_x = 97.0;
    CHECK(effective_throughput(std::vector<TargetTrial>{trial, other}).has_value());

    const auto one = effective_throughput(std::vector<TargetTrial>{trial});
    REQUIRE_FALSE(one.has_value());
    CHECK(one.error().code == ErrorCode::too_few);

    const auto same = effective_throughput(std::vector<TargetTrial>{trial, trial});
    REQUIRE_FALSE(same.has_value());
    CHECK(same.error().code == ErrorCode::bad_value);

    TargetTrial nowhere = trial;
    nowhere.to_x = 0.0;
    const auto no_axis = effective_throughput(std::vector<TargetTrial>{trial, nowhere});
    REQUIRE_FALSE(no_axis.has_value());
    CHECK(no_axis.error().code == ErrorCode::bad_value);
    CHECK(no_axis.error().message.find("Trial 2") != std::string::npos);

    other.movement_time_s = std::nan("");
    const auto broken = effective_throughput(std::vector<TargetTrial>{trial, other});
    REQUIRE_FALSE(broken.has_value());
    CHECK(broken.error().code == ErrorCode::bad_value);
}

} // namespace
} // namespace sagitta::estimator
