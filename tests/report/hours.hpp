// Hand-made hours for the tests of the report folder.
#pragma once

#include "report/calendar.hpp"
#include "report/session.hpp"
#include "store/store.hpp"

#include <cmath>

namespace sagitta::test {

constexpr store::PointerId k_mouse{1};
constexpr store::PointerId k_trackball{2};

inline report::UtcTime at(int year, unsigned month, unsigned day, int hour) {
    const date::sys_days start = date::year{year} / date::month{month} / date::day{day};
    return report::UtcTime{start.time_since_epoch() + std::chrono::hours{hour}};
}

inline report::Day day_of(int year, unsigned month, unsigned day) {
    return date::local_days{date::year{year} / date::month{month} / date::day{day}};
}

/// An hour of `clicks` equal clicks: D px in `ms`, 20 px wide targets, ME of 5 px.
inline store::StoredHour hour_of(report::UtcTime start, store::PointerId pointer, int clicks,
                                 double ms, double distance_px = 180.0) {
    store::StoredHour hour{start, pointer, store::k_unlabelled, {}};
    for (int i = 0; i < clicks; ++i) {
        estimator::Scores scores;
        // Alternating distances about D, so that slopes exist: MT grows as the square root of D.
        const double factor = i % 2 == 0 ? 0.8 : 1.25;
        scores.distance = estimator::Pixels::of(distance_px * factor);
        scores.direction = estimator::Degrees::of(45.0 * (i % 8));
        scores.movement_time = estimator::Micros{std::llround(1000.0 * ms * std::sqrt(factor))};
        scores.path = scores.distance * 1.1;
        scores.error = estimator::Pixels::of(5.0);
        scores.offset = scores.distance * 0.02;
        scores.initial_angle = estimator::Degrees::of(-3.0);
        scores.direction_changes = 2;
        scores.submovements = 3;
        scores.peak_speed = estimator::MillimetresPerSecond::of(150.0);
        hour.summary.add(estimator::Movement{estimator::PointerIndex{0},
                                             estimator::MovementKind::click,
                                             estimator::Button::left,
                                             {},
                                             estimator::PointerTime{scores.movement_time},
                                             scores});
        estimator::Exposure exposure{
            estimator::PointerIndex{0}, {}, estimator::Outcome::scored_click};
        exposure.active = scores.movement_time;
        exposure.hand_travel = estimator::Millimetres::of(10.0);
        exposure.reports = 100;
        hour.summary.add(exposure);
        ++hour.summary.presses;
    }
    return hour;
}

inline store::StoredPointer pointer_of(store::PointerId id, const char* name,
                                       estimator::Origin origin = estimator::Origin::live) {
    return {id,
            name,
            estimator::PointerKind::mouse,
            origin,
            3,
            1,
            2,
            estimator::Cpi::of(1000.0),
            estimator::CpiSource::udev,
            at(2026, 11, 1, 0)};
}

inline report::Session plain_session() {
    return {config::Settings{},
            report::Calendar::in_utc(),
            at(2026, 11, 29, 12),
            "test.db",
            false,
            false,
            {},
            false};
}

} // namespace sagitta::test
