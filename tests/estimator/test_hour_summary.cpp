#include "estimator/hour_summary.hpp"

#include <doctest/doctest.h>

#include <cmath>
#include <random>

namespace sagitta::estimator {
namespace {

Movement click() {
    Movement movement{PointerIndex{},
                      MovementKind::click,
                      Button::left,
                      PointerTime{Micros{1'000'000}},
                      PointerTime{Micros{1'800'000}},
                      Scores{}};
    Scores& scores = movement.scores;
    scores.distance = Pixels::of(300.0);
    scores.direction = Degrees::of(90.0);
    scores.movement_time = Micros{800'000};
    scores.path = Pixels::of(330.0);
    scores.error = Pixels::of(6.0);
    scores.offset = Pixels::of(-3.0);
    scores.initial_angle = Degrees::of(4.0);
    scores.direction_changes = 2;
    scores.submovements = 3;
    scores.peak_speed = MillimetresPerSecond::of(250.0);
    return movement;
}

TEST_CASE("sectors are centred on the eight directions and wrap at 360 degrees") {
    for (std::size_t sector = 0; sector < k_sectors; ++sector) {
        CAPTURE(sector);
        const double centre = 45.0 * static_cast<double>(sector);
        CHECK(sector_of(Degrees::of(centre)) == sector);
        CHECK(sector_of(Degrees::of(centre + 22.4)) == sector);
        CHECK(sector_of(Degrees::of(centre + 22.5)) == (sector + 1) % k_sectors);
    }
    CHECK(sector_of(Degrees::of(337.4)) == 7);
    CHECK(sector_of(Degrees::of(337.5)) == 0);
    CHECK(sector_of(Degrees::of(std::nextafter(360.0, 0.0))) == 0);
}

TEST_CASE("a scored click enters every statistic in its unit") {
    HourSummary summary;
    summary.add(click());
    CHECK(summary.clicks == 1);
    CHECK(summary.clicks_cpi_assumed == 0);
    CHECK(summary.movement_time == Micros{800'000});
    // 300 px with reference widths of 10, 20 and 40 px.
    CHECK(summary.difficulty_bits[0] == doctest::Approx(std::log2(31.0)));
    CHECK(summary.difficulty_bits[1] == doctest::Approx(std::log2(16.0)));
    CHECK(summary.difficulty_bits[2] == doctest::Approx(std::log2(8.5)));
    CHECK(summary.log_distance_time.mean_x == doctest::Approx(std::log(300.0)));
    CHECK(summary.log_distance_time.mean_y == doctest::Approx(std::log(0.8)));
    CHECK(summary.log_distance_error.mean_x == doctest::Approx(std::log(300.0)));
    CHECK(summary.log_distance_error.mean_y == doctest::Approx(std::log(6.0)));
    CHECK(summary.log_path_ratio.mean == doctest::Approx(std::log(1.1)));
    CHECK(summary.direction_changes.mean == 2.0);
    CHECK(summary.submovements.mean == 3.0);
    CHECK(summary.peak_speed_mm_s.mean == 250.0);
    // Within the 9 % of a bin.
    CHECK(summary.distance_px.quantile(0.5) == doctest::Approx(300.0).epsilon(0.09));
    CHECK(summary.movement_time_ms.quantile(0.5) == doctest::Approx(800.0).epsilon(0.09));
    CHECK(summary.error_centipx.quantile(0.5) == doctest::Approx(600.0).epsilon(0.09));
    CHECK(summary.sectors[2].offset_share.mean == doctest::Approx(-0.01));
    CHECK(summary.sectors[2].initial_angle_deg.mean == 4.0);
    CHECK(summary.sectors[0].offset_share.n == 0);
}

TEST_CASE("a drag is left out of the statistics and counted by its outcome") {
    Movement drag = click();
    drag.kind = MovementKind::drag;
    HourSummary summary;
    summary.add(drag);
    CHECK(summary.clicks == 0);
    CHECK(summary.log_distance_time.n == 0);
    CHECK(summary.distance_px.count() == 0);
    CHECK(summary.difficulty_bits[1] == 0.0);
    summary.add(Exposure{PointerIndex{}, drag.press, Outcome::scored_drag, Micros{700'000},
                         Millimetres::of(12.0), 640});
    CHECK(summary.outcomes[static_cast<std::size_t>(Outcome::scored_drag)] == 1);
    CHECK(summary.clicks == 0);
}

TEST_CASE("a movement error below a tenth of a px counts as a tenth in the logarithm") {
    for (const double error : {0.0, 0.05, 0.1}) {
        CAPTURE(error);
        Movement movement = click();
        movement.scores.error = Pixels::of(error);
        HourSummary summary;
        summary.add(movement);
        CHECK(summary.log_distance_error.mean_y == doctest::Approx(std::log(0.1)));
    }
    Movement movement = click();
    movement.scores.error = Pixels::of(0.2);
    HourSummary summary;
    summary.add(movement);
    CHECK(summary.log_distance_error.mean_y == doctest::Approx(std::log(0.2)));
}

TEST_CASE("clicks whose CPI is assumed are counted apart") {
    Movement movement = click();
    movement.scores.flags = static_cast<FlagSet>(Flag::cpi_assumed);
    HourSummary summary;
    summary.add(movement);
    movement.scores.flags = static_cast<FlagSet>(Flag::started_in_motion);
    summary.add(movement);
    CHECK(summary.clicks == 2);
    CHECK(summary.clicks_cpi_assumed == 1);
}

TEST_CASE("exposure adds up whatever the outcome") {
    HourSummary summary;
    for (std::size_t outcome = 0; outcome < k_outcomes; ++outcome) {
        summary.add(Exposure{PointerIndex{}, PointerTime{}, static_cast<Outcome>(outcome),
                             Micros{1000}, Millimetres::of(2.5), 10});
    }
    for (const std::uint64_t count : summary.outcomes) {
        CHECK(count == 1);
    }
    CHECK(summary.active == Micros{12'000});
    CHECK(summary.hand_travel.value() == doctest::Approx(30.0));
    CHECK(summary.motion_reports == 120);
    CHECK(summary.clicks == 0);
}

TEST_CASE("merged summaries equal the summary of all movements") {
    std::mt19937_64 random{19};
    std::uniform_real_distribution<double> share{0.0, 1.0};
    HourSummary whole;
    HourSummary first;
    HourSummary second;
    for (int i = 0; i < 400; ++i) {
        Movement movement = click();
        movement.scores.distance = Pixels::of(20.0 + 900.0 * share(random));
        movement.scores.direction = Degrees::of(359.9 * share(random));
        movement.scores.movement_time = Micros{300'000 + i * 1000};
        movement.scores.error = Pixels::of(20.0 * share(random));
        const Exposure exposure{PointerIndex{},
                                movement.press,
                                Outcome::scored_click,
                                Micros{500'000},
                                Millimetres::of(share(random)),
                                400};
        HourSummary& part = i % 4 == 0 ? first : second;
        for (HourSummary* summary : {&whole, &part}) {
            summary->add(movement);
            summary->add(exposure);
            summary->presses += 1;
            summary->wheel_120ths += 120;
        }
    }
    first.merge(second);
    CHECK(first.outcomes == whole.outcomes);
    CHECK(first.presses == 400);
    CHECK(first.wheel_120ths == 48'000);
    CHECK(first.motion_reports == whole.motion_reports);
    CHECK(first.active == whole.active);
    CHECK(first.hand_travel.value() == doctest::Approx(whole.hand_travel.value()));
    CHECK(first.clicks == 400);
    CHECK(first.movement_time == whole.movement_time);
    for (std::size_t i = 0; i < 3; ++i) {
        CHECK(first.difficulty_bits[i] == doctest::Approx(whole.difficulty_bits[i]));
    }
    CHECK(first.log_distance_time.m_xy == doctest::Approx(whole.log_distance_time.m_xy));
    CHECK(first.log_distance_error.m2_y == doctest::Approx(whole.log_distance_error.m2_y));
    CHECK(first.log_path_ratio.n == 400);
    CHECK(first.log_path_ratio.mean == doctest::Approx(whole.log_path_ratio.mean));
    CHECK(first.direction_changes.n == 400);
    CHECK(first.submovements.n == 400);
    CHECK(first.peak_speed_mm_s.n == 400);
    CHECK(first.distance_px.bins == whole.distance_px.bins);
    CHECK(first.movement_time_ms.bins == whole.movement_time_ms.bins);
    CHECK(first.error_centipx.bins == whole.error_centipx.bins);
    for (std::size_t sector = 0; sector < k_sectors; ++sector) {
        CHECK(first.sectors[sector].offset_share.m2 ==
              doctest::Approx(whole.sectors[sector].offset_share.m2));
        CHECK(first.sectors[sector].initial_angle_deg.n ==
              whole.sectors[sector].initial_angle_deg.n);
    }
}

} // namespace
} // namespace sagitta::estimator
