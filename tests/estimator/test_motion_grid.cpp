#include "estimator/motion_grid.hpp"

#include "estimator/pipeline.hpp"
#include "min_jerk_reports.hpp"

#include <algorithm>
#include <cmath>
#include <doctest/doctest.h>
#include <vector>

using namespace sagitta::estimator;
using namespace std::chrono_literals;
using sagitta::tests::MinJerkReports;

namespace {

PointerTime at(Micros time) {
    return PointerTime{time};
}

bool add(MotionGrid& grid, Micros time, std::int32_t dx, std::int32_t dy) {
    Report report;
    report.time = at(time);
    report.dx = dx;
    report.dy = dy;
    return grid.add({&report, 1}) == 1;
}

/// Sample of x at a time, by the grid's own steps.
double x_at(const MotionGrid& grid, const MotionGrid::Samples& samples, Micros time) {
    const auto place = (at(time) - grid.origin()) / k_sample_interval;
    return samples.x[static_cast<std::size_t>(place)];
}

struct Count final : MovementSink {
    int movements = 0;
    std::vector<Outcome> outcomes;
    void on_movement(const Movement&) override { ++movements; }
    void on_exposure(const Exposure& exposure) override { outcomes.push_back(exposure.outcome); }
    void on_press(PointerIndex, PointerTime, Button) override {}
    void on_wheel(PointerIndex, PointerTime, std::uint32_t) override {}
};

} // namespace

TEST_CASE("regular stamps are left as they are: steady motion gives a straight line") {
    MotionGrid grid{4s};
    for (int i = 1; i <= 100; ++i) {
        REQUIRE(add(grid, 1s + i * 8ms, 3, 0));
    }
    const MotionGrid::Samples samples = grid.samples();
    // 3 counts in 8 ms; position at a report is that of its count.
    for (int i = 20; i < 90; i += 5) {
        CHECK(x_at(grid, samples, 1s + i * 8ms) == doctest::Approx(3.0 * i).epsilon(1e-9));
    }
    CHECK(samples.x.back() == 300.0);
}

TEST_CASE("jittered stamps of a steady motion come out nearly straight") {
    MotionGrid grid{4s};
    std::uint32_t noise = 1;
    for (int i = 1; i <= 100; ++i) {
        noise = noise * 1664525U + 1013904223U; // any fixed sequence does
        const Micros late{static_cast<int>((noise >> 16U) % 8000U)};
        REQUIRE(add(grid, 1s + i * 8ms + late, 8, 0));
    }
    const MotionGrid::Samples samples = grid.samples();
    double worst = 0.0;
    for (int i = 20; i < 90; i += 5) {
        // On average a stamp is half an interval late, which is 4 counts.
        worst = std::max(worst, std::abs(x_at(grid, samples, 1s + i * 8ms) - 8.0 * i + 4.0));
    }
    CHECK(worst < 3.0); // as stamped, up to 4 counts to either side
}

TEST_CASE("a hand that dithers over the edge of a step stands still on it") {
    MotionGrid grid{4s};
    for (int i = 0; i < 20; ++i) {
        REQUIRE(add(grid, 1s + i * 20ms, i % 2 == 0 ? 1 : -1, 0));
    }
    const MotionGrid::Samples samples = grid.samples();
    for (int i = 1; i < 18; ++i) {
        CHECK(x_at(grid, samples, 1s + i * 20ms) == doctest::Approx(0.5));
    }
    CHECK(samples.x.back() == 0.0);
}

TEST_CASE("the first count's ramp is as long as the step behind it, and no longer than 80 ms") {
    MotionGrid grid{4s};
    REQUIRE(add(grid, 1s, 1, 0));
    REQUIRE(add(grid, 1s + 30ms, 1, 0));
    REQUIRE(add(grid, 1s + 530ms, 1, 0));
    const MotionGrid::Samples samples = grid.samples();
    CHECK(x_at(grid, samples, 1s - 35ms) == 0.0);
    CHECK(x_at(grid, samples, 1s - 15ms) == doctest::Approx(0.25));
    CHECK(x_at(grid, samples, 1s) == doctest::Approx(0.5));
    CHECK(x_at(grid, samples, 1s + 60ms) == doctest::Approx(2.0));
    CHECK(x_at(grid, samples, 1s + 450ms) == doctest::Approx(2.0));
    CHECK(x_at(grid, samples, 1s + 490ms) == doctest::Approx(2.25));
}

TEST_CASE("a run that no longer fits is refused, and the grid keeps what it had") {
    MotionGrid grid{1s};
    REQUIRE(add(grid, 10s, 1, 1));
    REQUIRE(add(grid, 10s + 900ms, 1, 1));
    CHECK_FALSE(add(grid, 10s + 1100ms, 1, 1));
    CHECK(grid.reports() == 2);
    CHECK(grid.samples().x.back() == 2.0);
}

TEST_CASE("a slow movement on a 400 CPI pointer does not fall apart into two") {
    // 6 mm in two strokes with a slow passage between them: on a fine sensor the hand is hardly
    // still for 100 ms, a coarse one shows no count for over 200 ms.
    for (const double cpi : {400.0, 1600.0, 6400.0}) {
        CAPTURE(cpi);
        const double counts_per_mm = cpi / k_mm_per_inch;
        Count found;
        Pipeline pipeline{Rules{}, found};
        PointerDescription mouse;
        pipeline.set_pointer(PointerIndex{0}, calibrate(mouse, Cpi::of(cpi), CpiSource::config,
                                                        Gain::flat(1000.0 / cpi).value()));
        MinJerkReports hand;
        hand.move(5.0 * counts_per_mm, 0.0, 1200ms).move(0.8 * counts_per_mm, 0.0, 500ms);
        hand.rest(60ms).click();
        pipeline.process(hand.reports());
        CHECK(found.outcomes == std::vector{Outcome::scored_click});
    }
}

TEST_CASE("a clear stop of 210 ms is a rest whatever the resolution") {
    for (const double counts : {120.0, 2000.0}) {
        CAPTURE(counts);
        Count found;
        Pipeline pipeline{Rules{}, found};
        PointerDescription mouse;
        pipeline.set_pointer(PointerIndex{0},
                             calibrate(mouse, Cpi::of(1000.0), CpiSource::config, Gain::unity()));
        std::vector<Report> reports;
        for (int stroke = 0; stroke < 2; ++stroke) {
            for (int i = 0; i < 30; ++i) {
                Report report;
                report.time = at(1s + stroke * 442ms + i * 8ms);
                report.dx = static_cast<std::int32_t>(counts / 30.0);
                reports.push_back(report);
            }
        }
        pipeline.process(reports);
        pipeline.finish();
        CHECK(found.outcomes == std::vector{Outcome::no_press, Outcome::no_press});
    }
}
