#include "daemon/clock_watch.hpp"

#include <chrono>
#include <ctime>

namespace sagitta::daemon {

namespace {

using estimator::Micros;
using estimator::PointerTime;
using estimator::UtcTime;
using namespace std::chrono_literals;

// Shorter sleeps and smaller steps matter to no movement and no hour.
constexpr Micros k_least_sleep = 500ms;
constexpr Micros k_least_step = 100ms;
constexpr Micros k_jitter = 1ms;

Micros now(clockid_t clock) {
    timespec time{};
    clock_gettime(clock, &time);
    return std::chrono::duration_cast<Micros>(std::chrono::seconds{time.tv_sec} +
                                              std::chrono::nanoseconds{time.tv_nsec});
}

Micros utc_minus_pointer(const ClockReading& reading) {
    return reading.realtime.time_since_epoch() - reading.monotonic.time_since_epoch();
}

Micros asleep(const ClockReading& reading) {
    return reading.boottime - reading.monotonic.time_since_epoch();
}

} // namespace

ClockReading SystemClocks::read() {
    // Three readings are one moment only if nothing came between them.
    ClockReading reading{};
    for (int attempt = 0; attempt < 4; ++attempt) {
        const Micros before = now(CLOCK_MONOTONIC);
        reading =
            ClockReading{UtcTime{now(CLOCK_REALTIME)}, PointerTime{before}, now(CLOCK_BOOTTIME)};
        if (now(CLOCK_MONOTONIC) - before < k_jitter) {
            break;
        }
    }
    return reading;
}

ClockWatch::ClockWatch(const ClockReading& first)
    : m_offset{utc_minus_pointer(first)}, m_asleep{asleep(first)} {}

ClockNews ClockWatch::update(const ClockReading& reading) {
    ClockNews news;
    const Micros slept = asleep(reading) - m_asleep;
    if (slept >= k_least_sleep) {
        news.slept = slept;
    }
    m_asleep = asleep(reading);

    // Sleep moves the offset too: the pointers' clock stood still.
    const Micros moved = utc_minus_pointer(reading) - m_offset.utc_minus_pointer;
    const Micros step = moved - (news.slept ? slept : Micros{0});
    if (step >= k_least_step || step <= -k_least_step) {
        news.step = step;
    }
    if (moved >= k_jitter || moved <= -k_jitter) {
        m_offset.utc_minus_pointer += moved;
    }
    return news;
}

} // namespace sagitta::daemon
