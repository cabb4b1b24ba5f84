#include "estimator/moments.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <random>
#include <vector>

namespace sagitta::estimator {
namespace {

struct Pairs {
    std::vector<double> x, y;
};

Pairs seeded_pairs(std::size_t n, double centre) {
    std::mt19937_64 random{7};
    std::normal_distribution<double> spread{0.0, 1.0};
    Pairs pairs;
    for (std::size_t i = 0; i < n; ++i) {
        pairs.x.push_back(centre + spread(random));
        pairs.y.push_back(0.5 * pairs.x.back() + spread(random));
    }
    return pairs;
}

TEST_CASE("moments of one, two and three values are those of the definition") {
    Moments moments;
    CHECK(moments.n == 0);
    CHECK(moments.mean == 0.0);
    moments.add(4.0);
    CHECK(moments.mean == 4.0);
    CHECK(moments.m2 == 0.0);
    moments.add(6.0);
    CHECK(moments.variance() == doctest::Approx(2.0));
    moments.add(11.0);
    CHECK(moments.mean == doctest::Approx(7.0));
    CHECK(moments.variance() == doctest::Approx(13.0));
}

TEST_CASE("merged moments equal one pass for random splits") {
    // A centre far from 0 shows whether merging loses digits.
    const Pairs pairs = seeded_pairs(2000, 1e6);
    PairMoments whole;
    for (std::size_t i = 0; i < pairs.x.size(); ++i) {
        whole.add(pairs.x[i], pairs.y[i]);
    }
    std::mt19937_64 random{11};
    for (const std::uint64_t parts : {1U, 2U, 3U, 17U, 400U}) {
        CAPTURE(parts);
        std::vector<PairMoments> split(parts);
        std::vector<Moments> split_x(parts);
        for (std::size_t i = 0; i < pairs.x.size(); ++i) {
            const auto part = random() % parts;
            split[part].add(pairs.x[i], pairs.y[i]);
            split_x[part].add(pairs.x[i]);
        }
        PairMoments merged;
        Moments merged_x;
        for (std::size_t part = 0; part < parts; ++part) {
            merged.merge(split[part]);
            merged_x.merge(split_x[part]);
        }
        CHECK(merged.n == whole.n);
        CHECK(merged.mean_x == doctest::Approx(whole.mean_x).epsilon(1e-13));
        CHECK(merged.mean_y == doctest::Approx(whole.mean_y).epsilon(1e-13));
        CHECK(merged.m2_x == doctest::Approx(whole.m2_x).epsilon(1e-9));
        CHECK(merged.m2_y == doctest::Approx(whole.m2_y).epsilon(1e-9));
        CHECK(merged.m_xy == doctest::Approx(whole.m_xy).epsilon(1e-9));
        CHECK(merged_x.mean == doctest::Approx(whole.mean_x).epsilon(1e-13));
        CHECK(merged_x.m2 == doctest::Approx(whole.m2_x).epsilon(1e-9));
    }
}

TEST_CASE("merging with empty moments changes nothing, either way") {
    Moments filled;
    filled.add(3.0);
    filled.add(5.0);
    const Moments before = filled;
    filled.merge(Moments{});
    CHECK(filled.n == before.n);
    CHECK(filled.mean == before.mean);
    CHECK(filled.m2 == before.m2);
    Moments empty;
    empty.merge(before);
    CHECK(empty.n == before.n);
    CHECK(empty.mean == before.mean);
    CHECK(empty.m2 == before.m2);
    empty = Moments{};
    empty.merge(Moments{});
    CHECK(empty.n == 0);
    CHECK(empty.mean == 0.0);
    PairMoments pair;
    pair.merge(PairMoments{});
    CHECK(pair.n == 0);
    CHECK(pair.mean_x == 0.0);
}

} // namespace
} // namespace sagitta::estimator
