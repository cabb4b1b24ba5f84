#include "estimator/hand/person.hpp"
#include "estimator/hand/random.hpp"
#include "estimator/moments.hpp"

#include <cmath>
#include <doctest/doctest.h>
#include <vector>

namespace {

using sagitta::estimator::Moments;
using namespace sagitta::estimator::hand;

TEST_CASE("random numbers repeat with their seed and differ between seeds and streams") {
    Random a{7, 1};
    Random same{7, 1};
    Random other_seed{8, 1};
    Random other_stream{7, 2};
    int equal_seed = 0;
    int equal_stream = 0;
    for (int i = 0; i < 100; ++i) {
        const double value = a.uniform();
        CHECK(value == same.uniform());
        equal_seed += value == other_seed.uniform() ? 1 : 0;
        equal_stream += value == other_stream.uniform() ? 1 : 0;
    }
    CHECK(equal_seed == 0);
    CHECK(equal_stream == 0);
}

TEST_CASE("random transforms have the moments they promise") {
    Random random{11};
    Moments uniform;
    Moments normal;
    Moments fourth;
    Moments log;
    constexpr int k_draws = 40000;
    int tails = 0;
    for (int i = 0; i < k_draws; ++i) {
        uniform.add(random.uniform(2.0, 4.0));
        const double z = random.normal();
        normal.add(z);
        fourth.add(z * z * z * z);
        tails += std::abs(z) > 1.959963984540054 ? 1 : 0;
        log.add(std::log(random.log_normal(3.0, 0.5)));
    }
    CHECK(uniform.mean == doctest::Approx(3.0).epsilon(0.005));
    CHECK(uniform.variance() == doctest::Approx(4.0 / 12.0).epsilon(0.02));
    CHECK(std::abs(normal.mean) < 0.015);
    CHECK(normal.variance() == doctest::Approx(1.0).epsilon(0.02));
    CHECK(fourth.mean == doctest::Approx(3.0).epsilon(0.05));
    CHECK(tails / static_cast<double>(k_draws) == doctest::Approx(0.05).epsilon(0.06));
    CHECK(log.mean == doctest::Approx(std::log(3.0)).epsilon(0.01));
    CHECK(log.variance() == doctest::Approx(0.25).epsilon(0.03));
}

TEST_CASE("below() covers its range evenly") {
    Random random{5};
    std::vector<int> hits(6, 0);
    for (int i = 0; i < 6000; ++i) {
        ++hits.at(random.below(6));
    }
    for (const int count : hits) {
        CHECK(count > 880);
        CHECK(count < 1120);
    }
}

TEST_CASE("people drawn from a population differ, and the same seed is the same person") {
    const Person middle;
    Moments log_performance;
    for (std::uint64_t seed = 1; seed <= 400; ++seed) {
        const Person person = draw_person(middle, seed);
        log_performance.add(std::log(person.index_of_performance / middle.index_of_performance));
        CHECK(person.lateral_noise > 0.0);
        CHECK(person.intercept.count() > 0);
    }
    CHECK(std::abs(log_performance.mean) < 0.03);
    CHECK(std::sqrt(log_performance.variance()) == doctest::Approx(0.15).epsilon(0.12));
    CHECK(draw_person(middle, 3).lateral_noise == draw_person(middle, 3).lateral_noise);
}

} // namespace
