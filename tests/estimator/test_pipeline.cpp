#include "estimator/pipeline.hpp"

#include "min_jerk_reports.hpp"

#include <cmath>
#include <cstdint>
#include <doctest/doctest.h>
#include <vector>

using namespace sagitta::estimator;
using namespace std::chrono_literals;
using sagitta::tests::MinJerkReports;

namespace {

constexpr PointerIndex k_mouse{0};
constexpr PointerIndex k_ball{1};

struct Collected final : MovementSink {
    std::vector<Movement> movements;
    std::vector<Exposure> exposures;
    std::uint64_t presses = 0;
    std::uint64_t wheel = 0;

    void on_movement(const Movement& movement) override { movements.push_back(movement); }
    void on_exposure(const Exposure& exposure) override { exposures.push_back(exposure); }
    void on_press(PointerIndex, PointerTime, Button) override { ++presses; }
    void on_wheel(PointerIndex, PointerTime, std::uint32_t steps) override { wheel += steps; }

    [[nodiscard]] std::vector<Outcome> outcomes() const {
        std::vector<Outcome> all;
        for (const Exposure& exposure : exposures) {
            all.push_back(exposure.outcome);
        }
        return all;
    }
};

Calibration mouse_at(double cpi, Gain gain = Gain::unity()) {
    PointerDescription description;
    return calibrate(description, Cpi::of(cpi), CpiSource::config, std::move(gain));
}

struct Bench {
    Collected found;
    Pipeline pipeline{Rules{}, found};

    explicit Bench(double cpi = 1000.0) {
        pipeline.set_pointer(k_mouse, mouse_at(cpi));
        pipeline.set_pointer(k_ball, mouse_at(cpi));
    }
};

} // namespace

TEST_CASE("a straight minimum-jerk movement is scored as it was made") {
    Bench bench;
    MinJerkReports hand;
    hand.move(300.0, 400.0, 600ms).rest(50ms).click();
    bench.pipeline.process(hand.reports());

    REQUIRE(bench.found.movements.size() == 1);
    const Movement& movement = bench.found.movements.front();
    CHECK(movement.kind == MovementKind::click);
    CHECK(movement.button == Button::left);
    CHECK(movement.scores.distance.value() == doctest::Approx(500.0).epsilon(0.003));
    // +y of the kernel is towards the person, so this one goes right and towards: 307 deg.
    CHECK(movement.scores.direction.value() == doctest::Approx(306.87).epsilon(0.001));
    // Source: minimum jerk (Flash & Hogan 1985): 10 % of the peak speed at .0865 T; 50 ms of rest.
    CHECK(seconds(movement.scores.movement_time) ==
          doctest::Approx(0.6 * (1.0 - 0.0865) + 0.05).epsilon(0.02));
    CHECK(movement.scores.path_ratio() >= 1.0);
    CHECK(movement.scores.path_ratio() == doctest::Approx(1.0).epsilon(0.002));
    CHECK(movement.scores.error.value() < 0.6);
    CHECK(movement.scores.axis_crossings == 0);
    CHECK(movement.scores.direction_changes == 0);
    CHECK(movement.scores.orthogonal_changes == 0);
    // Peak of minimum jerk: 1.875 D/T; the low-pass takes a little.
    CHECK(movement.scores.peak_speed.value() ==
          doctest::Approx(1.875 * 500.0 * 0.0254 / 0.6).epsilon(0.03));
    CHECK(seconds(movement.scores.time_to_peak) ==
          doctest::Approx(0.6 * (0.5 - 0.0865)).epsilon(0.03));
    CHECK(movement.scores.hand_travel.value() == doctest::Approx(12.7).epsilon(0.005));
    CHECK(movement.scores.submovements == 1);
    CHECK(movement.scores.flags == 0);
    CHECK(bench.found.outcomes() == std::vector{Outcome::scored_click});
    CHECK(bench.found.presses == 1);
}

TEST_CASE("the movement a press closes starts at the press before") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(50ms).click().rest(500ms);
    hand.move(0.0, -150.0, 400ms).rest(50ms).click();
    bench.pipeline.process(hand.reports());

    REQUIRE(bench.found.movements.size() == 2);
    CHECK(bench.found.movements[1].scores.distance.value() == doctest::Approx(150.0).epsilon(0.01));
    CHECK(bench.found.movements[1].scores.direction.value() == doctest::Approx(90.0));
}

TEST_CASE("still time before the press is dwell, and too much of it leaves the movement out") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(900ms).click().rest(600ms);
    hand.move(200.0, 0.0, 400ms).rest(1100ms).click();
    bench.pipeline.process(hand.reports());

    CHECK(bench.found.outcomes() == std::vector{Outcome::scored_click, Outcome::long_dwell});
    const double dwell = seconds(bench.found.movements.at(0).scores.dwell);
    CHECK(dwell > 0.9);
    CHECK(dwell < 0.96);
}

TEST_CASE("a still gap separates movements, and one without a press is counted") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(300ms).move(100.0, 0.0, 300ms).rest(50ms).click();
    bench.pipeline.process(hand.reports());

    CHECK(bench.found.outcomes() == std::vector{Outcome::no_press, Outcome::scored_click});
    CHECK(bench.found.movements.at(0).scores.distance.value() ==
          doctest::Approx(100.0).epsilon(0.02));
}

TEST_CASE("presses that are not the end of an aimed movement are counted by their reason") {
    Bench bench;
    MinJerkReports hand;

    SUBCASE("without motion") {
        hand.rest(500ms).click();
        bench.pipeline.process(hand.reports());
        CHECK(bench.found.outcomes() == std::vector{Outcome::no_motion});
    }
    SUBCASE("too short") {
        hand.move(15.0, 0.0, 300ms).rest(50ms).click();
        bench.pipeline.process(hand.reports());
        CHECK(bench.found.outcomes() == std::vector{Outcome::too_short});
    }
    SUBCASE("too slow") {
        hand.move(900.0, 0.0, 5000ms).rest(20ms).click();
        bench.pipeline.process(hand.reports());
        CHECK(bench.found.outcomes() == std::vector{Outcome::too_slow});
    }
    SUBCASE("a double click") {
        hand.move(200.0, 0.0, 400ms).rest(50ms).click().rest(60ms).click();
        bench.pipeline.process(hand.reports());
        CHECK(bench.found.outcomes() == std::vector{Outcome::scored_click, Outcome::repeat_press});
    }
    SUBCASE("another button held") {
        hand.press(Button::right).move(200.0, 0.0, 400ms).rest(50ms).click();
        bench.pipeline.process(hand.reports());
        CHECK(bench.found.outcomes() ==
              std::vector{Outcome::no_motion, Outcome::other_button_down});
    }
    SUBCASE("wandering beyond the buffer") {
        for (int i = 0; i < 6; ++i) {
            hand.move(i % 2 == 0 ? 600.0 : -500.0, 0.0, 1900ms);
        }
        hand.rest(50ms).click();
        bench.pipeline.process(hand.reports());
        CHECK(bench.found.outcomes() == std::vector{Outcome::wandering});
        CHECK(seconds(bench.found.exposures.at(0).active) > 10.0);
        CHECK(bench.found.exposures.at(0).hand_travel.value() ==
              doctest::Approx(3300.0 * 0.0254).epsilon(0.01));
    }
    CHECK(bench.found.movements.size() <= 1);
}

TEST_CASE("a press followed by motion is a drag, closed by its release and kept apart") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(50ms).press(Button::left);
    hand.rest(80ms).move(0.0, 120.0, 500ms).rest(40ms).release(Button::left);
    bench.pipeline.process(hand.reports());

    REQUIRE(bench.found.movements.size() == 2);
    CHECK(bench.found.movements[0].kind == MovementKind::click);
    CHECK(bench.found.movements[1].kind == MovementKind::drag);
    CHECK(bench.found.movements[1].scores.distance.value() == doctest::Approx(120.0).epsilon(0.02));
    CHECK(bench.found.presses == 1);
}

TEST_CASE("a wobble between press and release is no drag") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(50ms).press(Button::left);
    hand.move(2.0, 0.0, 60ms).release(Button::left);
    bench.pipeline.process(hand.reports());
    CHECK(bench.found.outcomes() == std::vector{Outcome::scored_click, Outcome::no_press});
}

TEST_CASE("a wheel step breaks the run and is counted") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).wheel(120).move(100.0, 0.0, 400ms).rest(50ms).click();
    bench.pipeline.process(hand.reports());
    CHECK(bench.found.outcomes() == std::vector{Outcome::no_press, Outcome::scored_click});
    CHECK(bench.found.movements.at(0).scores.distance.value() ==
          doctest::Approx(100.0).epsilon(0.02));
    CHECK((bench.found.movements.at(0).scores.flags &
           static_cast<FlagSet>(Flag::started_in_motion)) != 0);
    CHECK(bench.found.wheel == 120);
}

TEST_CASE("another pointer that moves breaks the run, and each pointer keeps its own") {
    Bench bench;
    MinJerkReports mouse;
    mouse.move(200.0, 0.0, 400ms).rest(900ms).click();
    MinJerkReports ball{k_ball, 1500ms};
    ball.move(0.0, 90.0, 300ms).rest(40ms).click();
    std::vector<Report> merged = mouse.reports();
    merged.insert(merged.end(), ball.reports().begin(), ball.reports().end());
    std::stable_sort(merged.begin(), merged.end(),
                     [](const Report& a, const Report& b) { return a.time < b.time; });
    bench.pipeline.process(merged);

    // The mouse's run was broken, so its late press finds nothing to close.
    CHECK(bench.found.outcomes() ==
          std::vector{Outcome::no_press, Outcome::scored_click, Outcome::no_motion});
    CHECK(bench.found.movements.at(0).pointer == k_ball);
}

TEST_CASE("lost reports leave the movement out, and the next after a rest is whole again") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(50ms).click().rest(400ms);
    hand.move(200.0, 0.0, 400ms).rest(50ms).click();
    std::vector<Report> reports = hand.reports();
    reports[100].after_loss = true;
    bench.pipeline.process(reports);
    CHECK(bench.found.outcomes() ==
          std::vector{Outcome::lost_reports, Outcome::lost_reports, Outcome::scored_click});
}

TEST_CASE("a stamp that runs backwards counts as a loss and never breaks the buffer") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(50ms).click();
    std::vector<Report> reports = hand.reports();
    for (std::size_t i = 200; i < reports.size(); ++i) {
        reports[i].time -= 1h;
    }
    bench.pipeline.process(reports);
    CHECK(bench.found.outcomes() == std::vector{Outcome::lost_reports, Outcome::lost_reports});
}

TEST_CASE("a pointer that vanishes in mid-movement interrupts its run only") {
    Bench bench;
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms);
    bench.pipeline.process(hand.reports());
    bench.pipeline.interrupt(k_mouse);
    CHECK(bench.found.outcomes() == std::vector{Outcome::interrupted});

    MinJerkReports again{k_mouse, 10s};
    again.move(100.0, 0.0, 400ms).rest(50ms).click();
    bench.pipeline.process(again.reports());
    CHECK(bench.found.movements.size() == 1);
}

TEST_CASE("an assumed resolution is marked on the movement") {
    Bench bench;
    PointerDescription unknown;
    bench.pipeline.set_pointer(k_mouse,
                               calibrate(unknown, std::nullopt, CpiSource::config, Gain::unity()));
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(50ms).click();
    bench.pipeline.process(hand.reports());
    CHECK((bench.found.movements.at(0).scores.flags & static_cast<FlagSet>(Flag::cpi_assumed)) !=
          0);
}

TEST_CASE("a gain table shapes the screen plane and leaves the hand plane alone") {
    Bench bench;
    const Gain doubled =
        Gain::table({{MillimetresPerSecond::zero(), 2.0}, {MillimetresPerSecond::of(1000.0), 2.0}})
            .value();
    MinJerkReports hand;
    hand.move(200.0, 0.0, 400ms).rest(50ms).click();
    bench.pipeline.process(hand.reports());
    Bench table;
    table.pipeline.set_pointer(k_mouse, mouse_at(1000.0, doubled));
    table.pipeline.process(hand.reports());

    const Scores& flat = bench.found.movements.at(0).scores;
    const Scores& shaped = table.found.movements.at(0).scores;
    CHECK(shaped.distance.value() == doctest::Approx(2.0 * flat.distance.value()).epsilon(1e-5));
    CHECK(shaped.hand_travel.value() == doctest::Approx(flat.hand_travel.value()));
    CHECK(shaped.movement_time == flat.movement_time);
}

TEST_CASE("a table made for normalised counts is brought to the pointer's own resolution") {
    // Source: the documented rule that desktops bring finer pointers to 1000 CPI, slower ones not.
    const Gain table =
        Gain::table({{MillimetresPerSecond::of(10.0), 1.0}, {MillimetresPerSecond::of(100.0), 2.0}})
            .value();
    const auto factor = [&](double udev_cpi, double hand_speed) {
        PointerDescription pointer;
        pointer.udev_cpi = Cpi::of(udev_cpi);
        const Calibration calibration =
            calibrate(pointer, std::nullopt, CpiSource::config, table, Cpi::of(1000.0));
        return calibration.px_per_count_x *
               calibration.gain.factor_at(MillimetresPerSecond::of(hand_speed));
    };
    CHECK(factor(1000.0, 55.0) == doctest::Approx(1.5));
    // 1600 CPI: counts times 0.625, the speed is what the hand does.
    CHECK(factor(1600.0, 55.0) == doctest::Approx(0.625 * 1.5));
    // 400 CPI: counts as they are, which look like 0.4 times the speed.
    CHECK(factor(400.0, 55.0 / 0.4) == doctest::Approx(1.5));
}
