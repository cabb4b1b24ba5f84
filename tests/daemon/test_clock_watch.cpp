#include "daemon/clock_watch.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace std::chrono_literals;
using daemon::ClockReading;
using daemon::ClockWatch;
using estimator::Micros;

namespace {

ClockReading reading(Micros realtime, Micros monotonic, Micros boottime) {
    return {estimator::UtcTime{realtime}, estimator::PointerTime{monotonic}, boottime};
}

} // namespace

TEST_CASE("time that only passes is no news, and jitter does not move the offset") {
    ClockWatch watch{reading(1000s, 10s, 15s)};
    const auto news = watch.update(reading(1060s + 400us, 70s, 75s + 300us));
    CHECK_FALSE(news.slept);
    CHECK_FALSE(news.step);
    CHECK(watch.offset().utc_minus_pointer == Micros{990s});
}

TEST_CASE("a sleep is told once, and moves the offset by its length") {
    ClockWatch watch{reading(1000s, 10s, 15s)};
    const auto news = watch.update(reading(4601s, 11s, 3616s));
    CHECK(news.slept == Micros{3600s});
    CHECK_FALSE(news.step);
    CHECK(watch.offset().utc_minus_pointer == Micros{4590s});
    CHECK_FALSE(watch.update(reading(4602s, 12s, 3617s)).slept);
}

TEST_CASE("a clock set backwards is a step with its sign") {
    ClockWatch watch{reading(1000s, 10s, 15s)};
    const auto news = watch.update(reading(501s, 11s, 16s));
    CHECK_FALSE(news.slept);
    CHECK(news.step == Micros{-500s});
    CHECK(watch.offset().to_utc(estimator::PointerTime{11s}) == estimator::UtcTime{501s});
}

TEST_CASE("a clock set during sleep gives both") {
    ClockWatch watch{reading(1000s, 10s, 10s)};
    const auto news = watch.update(reading(1000s + 60s + 7s, 10s, 70s));
    CHECK(news.slept == Micros{60s});
    CHECK(news.step == Micros{7s});
}

TEST_CASE("a slow drift moves the offset without being a step") {
    ClockWatch watch{reading(1000s, 10s, 10s)};
    CHECK_FALSE(watch.update(reading(1010s + 20ms, 20s, 20s)).step);
    CHECK(watch.offset().utc_minus_pointer == Micros{990s + 20ms});
}

TEST_CASE("the system's clocks agree with each other") {
    daemon::SystemClocks clocks;
    const auto first = clocks.read();
    const auto second = clocks.read();
    CHECK(second.monotonic >= first.monotonic);
    CHECK(first.boottime >= first.monotonic.time_since_epoch() - 1ms);
    CHECK_FALSE(ClockWatch{first}.update(second).slept);
}
