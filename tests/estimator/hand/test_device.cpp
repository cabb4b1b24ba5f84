#include "estimator/hand/device.hpp"

#include <algorithm>
#include <cmath>
#include <doctest/doctest.h>

namespace {

using namespace sagitta::estimator;
using namespace sagitta::estimator::hand;

constexpr PointerTime k_start{std::chrono::hours{500000}};

AimedPath some_path(std::uint64_t seed, double distance_mm = 25.0) {
    Random random{seed};
    return aim(Person{}, {},
               {Millimetres::of(distance_mm), Degrees::of(30.0 * static_cast<double>(seed)),
                Millimetres::of(1.5)},
               random);
}

Electronics troubled() {
    Electronics electronics;
    electronics.reports_per_s = 1000.0;
    electronics.cpi = Cpi::of(1600.0);
    electronics.jitter = 1.0;
    electronics.late_share = 0.05;
    electronics.doubled_share = 0.05;
    electronics.merged_share = 0.05;
    return electronics;
}

bool in_order(const ReportBatch& batch) {
    return std::is_sorted(batch.begin(), batch.end(),
                          [](const Report& a, const Report& b) { return a.time < b.time; });
}

TEST_CASE("cumulative counts never drift from the path by more than one count") {
    Device device{PointerIndex{3}, troubled(), 17};
    const double counts_per_mm = 1600.0 / 25.4;
    Point true_mm;
    std::int64_t x = 0;
    std::int64_t y = 0;
    PointerTime start = k_start;
    for (std::uint64_t i = 1; i <= 60; ++i) {
        const AimedPath path = some_path(i);
        ReportBatch batch;
        device.move(path, start, batch);
        REQUIRE(in_order(batch));
        for (const Report& report : batch) {
            REQUIRE(report.pointer == PointerIndex{3});
            x += report.dx;
            y -= report.dy;
        }
        true_mm.x_mm += path.end().x_mm;
        true_mm.y_mm += path.end().y_mm;
        REQUIRE(std::abs(static_cast<double>(x) - true_mm.x_mm * counts_per_mm) <= 1.0 + 1e-6);
        REQUIRE(std::abs(static_cast<double>(y) - true_mm.y_mm * counts_per_mm) <= 1.0 + 1e-6);
        start += std::chrono::seconds{5};
    }
}

TEST_CASE("a device is deterministic in its seed") {
    const AimedPath path = some_path(1);
    const auto reports = [&path](std::uint64_t seed) {
        Device device{PointerIndex{}, troubled(), seed};
        ReportBatch batch;
        device.move(path, k_start, batch);
        device.press(k_start + std::chrono::seconds{2}, Button::left, batch);
        return batch;
    };
    const auto same = [](const Report& a, const Report& b) {
        return a.time == b.time && a.dx == b.dx && a.dy == b.dy && a.pressed == b.pressed;
    };
    const ReportBatch one = reports(5);
    const ReportBatch again = reports(5);
    const ReportBatch other = reports(6);
    CHECK(std::equal(one.begin(), one.end(), again.begin(), again.end(), same));
    CHECK_FALSE(std::equal(one.begin(), one.end(), other.begin(), other.end(), same));
}

TEST_CASE("reports come at the report rate, at most one an interval without troubles") {
    for (const double rate : {125.0, 500.0, 1000.0, 8000.0}) {
        Electronics electronics;
        electronics.reports_per_s = rate;
        electronics.cpi = Cpi::of(25400.0); // fine enough that most polls see motion
        electronics.jitter = 0.0;
        electronics.late_share = 0.0;
        Device device{PointerIndex{}, electronics, 1};
        const AimedPath path = some_path(2, 60.0);
        ReportBatch batch;
        device.move(path, k_start, batch);
        const double expected = path.motion_s() * rate;
        CHECK(static_cast<double>(batch.size()) > 0.75 * expected);
        CHECK(static_cast<double>(batch.size()) < expected + 2.0);
        const auto interval = Micros{std::llround(1e6 / rate)};
        for (std::size_t i = 1; i < batch.size(); ++i) {
            REQUIRE(batch[i].time - batch[i - 1].time >= interval - Micros{1});
        }
    }
}

TEST_CASE("jitter delays a stamp by at most one interval") {
    Electronics electronics;
    electronics.reports_per_s = 125.0;
    electronics.cpi = Cpi::of(25400.0);
    electronics.jitter = 1.0;
    electronics.late_share = 0.0;
    Electronics steady = electronics;
    steady.jitter = 0.0;
    const AimedPath path = some_path(2, 60.0);
    ReportBatch jittered;
    ReportBatch exact;
    Device{PointerIndex{}, electronics, 9}.move(path, k_start, jittered);
    Device{PointerIndex{}, steady, 9}.move(path, k_start, exact);
    REQUIRE(jittered.size() == exact.size());
    bool moved = false;
    for (std::size_t i = 0; i < exact.size(); ++i) {
        const Micros lag = jittered[i].time - exact[i].time;
        REQUIRE(lag >= Micros{0});
        REQUIRE(lag <= Micros{8001});
        moved = moved || lag > Micros{4000};
    }
    CHECK(moved);
}

TEST_CASE("coalescing at 60 Hz keeps all counts in fewer reports") {
    Electronics electronics;
    electronics.reports_per_s = 1000.0;
    Electronics coalesced = electronics;
    coalesced.coalesced_per_s = 60.0;
    const AimedPath path = some_path(4, 40.0);
    const auto total = [](const ReportBatch& batch) {
        std::int64_t x = 0;
        for (const Report& report : batch) {
            x += report.dx;
        }
        return x;
    };
    ReportBatch plain;
    ReportBatch few;
    Device{PointerIndex{}, electronics, 9}.move(path, k_start, plain);
    Device{PointerIndex{}, coalesced, 9}.move(path, k_start, few);
    CHECK(few.size() <= static_cast<std::size_t>(path.motion_s() * 60.0) + 2);
    CHECK(few.size() * 4 < plain.size());
    CHECK(std::abs(total(plain) - total(few)) <= 1);
}

TEST_CASE("the kernel's y points towards the person") {
    Device device{PointerIndex{}, {}, 1};
    ReportBatch batch;
    device.move([](double t) { return Point{0.0, 10.0 * minimum_jerk(t)}; }, 1.0, k_start, batch);
    int dy = 0;
    for (const Report& report : batch) {
        dy += report.dy;
    }
    CHECK(std::abs(dy + 1000.0 * 10.0 / 25.4) <= 1.0);
}

TEST_CASE("buttons and wheel steps keep the order of time after late motion") {
    Electronics electronics = troubled();
    electronics.late_share = 1.0;
    Device device{PointerIndex{}, electronics, 2};
    const AimedPath path = some_path(5);
    const PointerTime end = k_start + Micros{std::llround(path.motion_s() * 1e6)};
    ReportBatch batch;
    device.move(path, k_start, batch);
    device.press(end, Button::right, batch);
    device.release(end, Button::right, batch);
    device.wheel(end, 120, batch);
    REQUIRE(in_order(batch));
    const std::size_t n = batch.size();
    CHECK(batch[n - 3].pressed == static_cast<ButtonSet>(Button::right));
    CHECK(batch[n - 2].released == static_cast<ButtonSet>(Button::right));
    CHECK(batch[n - 1].wheel_120ths == 120);
    CHECK(device.last_stamp() == batch.back().time);
}

} // namespace
