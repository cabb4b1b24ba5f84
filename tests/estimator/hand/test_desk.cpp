#include "estimator/hand/desk.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <doctest/doctest.h>
#include <map>
#include <set>

namespace {

using namespace sagitta::estimator;
using namespace sagitta::estimator::hand;
using std::chrono::days;
using std::chrono::sys_days;

/// Half-days of an hour.
DeskPlan plan_of(std::uint64_t seed, int calendar_days) {
    DeskPlan plan;
    plan.seed = seed;
    plan.days = calendar_days;
    plan.morning_end = plan.morning_start + std::chrono::hours{1};
    plan.afternoon_end = plan.afternoon_start + std::chrono::hours{1};
    plan.pointers.resize(1);
    plan.pointers[0].description.name = "Upright mouse";
    return plan;
}

std::unique_ptr<Desk> desk_of(const DeskPlan& plan) {
    auto desk = Desk::make(plan);
    REQUIRE(desk.has_value());
    return std::move(*desk);
}

/// Calls `take` with every report, in order.
template <class Take>
void run(Desk& desk, const Take& take) {
    ReportBatch batch;
    do {
        REQUIRE(desk.next(batch).has_value());
        REQUIRE(batch.size() <= Desk::k_max_batch);
        for (const Report& report : batch) {
            take(report);
        }
    } while (!batch.empty());
}

TEST_CASE("a desk is deterministic in its seed") {
    const auto digest = [](std::uint64_t seed) {
        std::uint64_t sum = 0;
        auto desk = desk_of(plan_of(seed, 1));
        run(*desk, [&sum](const Report& report) {
            sum = sum * 31 + static_cast<std::uint64_t>(report.time.time_since_epoch().count()) +
                  static_cast<std::uint64_t>(report.dx) * 7 + report.pressed;
        });
        return sum;
    };
    CHECK(digest(1) == digest(1));
    CHECK(digest(1) != digest(2));
}

TEST_CASE("reports of a desk come in the order of time, within working hours, not at weekends") {
    DeskPlan plan = plan_of(3, 7); // Monday to Sunday
    plan.utc_offset = std::chrono::hours{1};
    auto desk = desk_of(plan);
    PointerTime last{};
    std::set<int> working;
    std::uint64_t reports = 0;
    int disordered = 0;
    int untimely = 0;
    run(*desk, [&](const Report& report) {
        disordered += report.time < last ? 1 : 0;
        last = report.time;
        const sys_days day =
            std::chrono::floor<days>(UtcTime{report.time.time_since_epoch()} + plan.utc_offset);
        working.insert(static_cast<int>((day - plan.first_day).count()));
        const Micros of_day = UtcTime{report.time.time_since_epoch()} + plan.utc_offset - day;
        untimely +=
            of_day < plan.morning_start || of_day > plan.afternoon_end + std::chrono::minutes{1}
                ? 1
                : 0;
        ++reports;
    });
    CHECK(disordered == 0);
    CHECK(untimely == 0);
    CHECK(working == std::set<int>{0, 1, 2, 3, 4});
    CHECK(reports > 20000);
    CHECK(UtcTime{last.time_since_epoch()} >= desk->begin());
    CHECK(UtcTime{last.time_since_epoch()} <= desk->end() + std::chrono::minutes{1});
}

TEST_CASE("every button that goes down comes up again before the next") {
    auto desk = desk_of(plan_of(4, 1));
    ButtonSet down = 0;
    int presses = 0;
    int wheels = 0;
    run(*desk, [&](const Report& report) {
        if (report.pressed != 0) {
            REQUIRE(down == 0);
            down = report.pressed;
            ++presses;
        }
        if (report.released != 0) {
            REQUIRE(down == report.released);
            down = 0;
        }
        wheels += report.wheel_120ths > 0 ? 1 : 0;
    });
    CHECK(down == 0);
    CHECK(presses > 100);
    CHECK(wheels > 100);
}

TEST_CASE("the schedule decides which pointer works in which half-day") {
    DeskPlan plan = plan_of(5, 2);
    plan.pointers.resize(2);
    plan.half_days = {PointerIndex{1}, PointerIndex{0}, PointerIndex{0}};
    auto desk = desk_of(plan);
    std::map<int, std::set<int>> pointers; // by half-day since the start
    run(*desk, [&](const Report& report) {
        const auto since = UtcTime{report.time.time_since_epoch()} - UtcTime{plan.first_day};
        const auto half = static_cast<int>(since / std::chrono::hours{12});
        const bool edge = since % std::chrono::hours{12} < std::chrono::minutes{2};
        if (!edge) {
            pointers[half].insert(static_cast<int>(report.pointer));
        }
    });
    CHECK(pointers[0] == std::set<int>{1});
    CHECK(pointers[1] == std::set<int>{0});
    CHECK(pointers[2] == std::set<int>{0});
    CHECK(pointers[3] == std::set<int>{1}); // the schedule starts again
}

TEST_CASE("the truths name every aimed movement, and are drained") {
    DeskPlan plan = plan_of(6, 1);
    plan.keep_truths = true;
    auto desk = desk_of(plan);
    std::uint64_t presses = 0;
    run(*desk, [&presses](const Report& report) { presses += report.pressed != 0 ? 1 : 0; });
    const std::vector<AimedTruth> truths = desk->take_truths();
    CHECK(truths.size() > presses / 2);
    CHECK(desk->take_truths().empty());
    std::set<MovementKind> kinds;
    for (const AimedTruth& truth : truths) {
        REQUIRE(truth.press > truth.start);
        REQUIRE(truth.distance.value() > 0.0);
        REQUIRE(truth.width.value() > 0.0);
        kinds.insert(truth.kind);
    }
    CHECK(kinds.size() == 2);
}

TEST_CASE("a pointer's effect changes the time of its movements by what was asked") {
    const auto mean_time = [](double performance) {
        DeskPlan plan = plan_of(7, 5);
        plan.pointers[0].electronics.reports_per_s = 20.0; // only the truths count here
        plan.keep_truths = true;
        plan.person.intercept = Micros{0};
        plan.person.session_spread = 0.0;
        plan.activities = {};
        plan.activities.slow_press = 0.0;
        plan.activities.long_dwell = 0.0;
        plan.pointers[0].effect.performance = performance;
        auto desk = desk_of(plan);
        run(*desk, [](const Report&) {});
        double time = 0.0;
        double bits = 0.0;
        for (const AimedTruth& truth : desk->take_truths()) {
            time += seconds(truth.press - truth.start);
            bits += std::log2(truth.distance / truth.width + 1.0);
        }
        return time / bits;
    };
    CHECK(mean_time(0.8) / mean_time(1.0) == doctest::Approx(1.25).epsilon(0.03));
}

TEST_CASE("fatigue slows the afternoon and practice the first days") {
    const auto pace = [](const Course& course) {
        DeskPlan plan = plan_of(8, 5);
        plan.pointers[0].electronics.reports_per_s = 20.0; // only the truths count here
        plan.keep_truths = true;
        plan.course = course;
        plan.person.session_spread = 0.0;
        auto desk = desk_of(plan);
        run(*desk, [](const Report&) {});
        std::array<double, 4> time{}; // first day, last day; morning, afternoon
        std::array<double, 4> count{};
        for (const AimedTruth& truth : desk->take_truths()) {
            const auto since =
                truth.press.time_since_epoch() - Micros{plan.first_day.time_since_epoch()};
            const auto day = since / days{1};
            const std::size_t half = since % days{1} < std::chrono::hours{13} ? 2 : 3;
            const double s = seconds(truth.press - truth.start);
            time[half] += s;
            count[half] += 1.0;
            if (day == 0 || day == 4) {
                time[day == 0 ? 0 : 1] += s;
                count[day == 0 ? 0 : 1] += 1.0;
            }
        }
        for (std::size_t i = 0; i < time.size(); ++i) {
            time[i] /= count[i];
        }
        return time;
    };
    Course tiring;
    tiring.fatigue = 0.5;
    const auto tired = pace(tiring);
    CHECK(tired[3] / tired[2] > 1.15);
    Course learning;
    learning.practice = 0.5;
    learning.practice_days = 1.0;
    const auto learnt = pace(learning);
    CHECK(learnt[0] / learnt[1] > 1.2);
}

TEST_CASE("a wrong plan is refused with a sentence that says why") {
    DeskPlan none = plan_of(1, 1);
    none.pointers.clear();
    DeskPlan unknown = plan_of(1, 1);
    unknown.half_days = {PointerIndex{4}};
    DeskPlan still = plan_of(1, 1);
    still.pointers[0].electronics.reports_per_s = 0.0;
    DeskPlan backwards = plan_of(1, 1);
    backwards.morning_end = std::chrono::hours{1};
    DeskPlan pointless = plan_of(1, 1);
    pointless.targets.width = Pixels::zero();
    DeskPlan powerless = plan_of(1, 1);
    powerless.person.index_of_performance = BitsPerSecond::zero();
    for (const DeskPlan& plan : {none, unknown, still, backwards, pointless, powerless}) {
        const auto desk = Desk::make(plan);
        REQUIRE_FALSE(desk.has_value());
        CHECK(desk.error().code == ErrorCode::bad_value);
        CHECK(desk.error().message.size() > 20);
    }
}

TEST_CASE("the map room alternates its two pointers by days in balanced pairs") {
    const sys_days monday{days{20458}};
    const DeskPlan plan = map_room_desk(3, 4, monday);
    REQUIRE(plan.pointers.size() == 2);
    CHECK(plan.pointers[0].description.name == "Upright mouse");
    CHECK(plan.pointers[1].description.name == "Thumb trackball");
    REQUIRE(plan.half_days.size() == 40);
    for (std::size_t pair = 0; pair < 10; ++pair) {
        int trackball = 0;
        for (std::size_t i = 0; i < 4; ++i) {
            trackball += static_cast<int>(plan.half_days[4 * pair + i]);
        }
        CHECK(trackball == 2);
        CHECK(plan.half_days[4 * pair] == plan.half_days[4 * pair + 1]);
    }
    CHECK(map_room_desk(3, 4, monday).half_days == plan.half_days);
    const auto desk = desk_of(plan);
    REQUIRE(desk->pointers().size() == 2);
    CHECK(desk->pointers()[1].origin == Origin::simulated);
    CHECK(desk->pointers()[1].kind == PointerKind::trackball);
    CHECK(desk->pointers()[1].udev_cpi == Cpi::of(800.0));
}

} // namespace
