// The system's clocks, and what happened to them between two readings: the machine slept, or its
// clock was set.
#pragma once

#include "estimator/units.hpp"

#include <optional>

namespace sagitta::daemon {

/// The three clocks at one moment.
struct ClockReading {
    estimator::UtcTime realtime;
    estimator::PointerTime monotonic; ///< stands still while the machine sleeps
    estimator::Micros boottime;       ///< like monotonic, but counts sleep
};

/// Where the time comes from; a test puts its own in place.
class Clocks {
public:
    Clocks() = default;
    Clocks(const Clocks&) = delete;
    Clocks& operator=(const Clocks&) = delete;
    virtual ~Clocks() = default;
    [[nodiscard]] virtual ClockReading read() = 0;
};

/// CLOCK_REALTIME, CLOCK_MONOTONIC, CLOCK_BOOTTIME.
class SystemClocks final : public Clocks {
public:
    [[nodiscard]] ClockReading read() override;
};

struct ClockNews {
    std::optional<estimator::Micros> slept; ///< the machine slept this long
    std::optional<estimator::Micros> step;  ///< the clock was set, + = forwards
};

/// Compares readings, once per turn of the loop. Pure.
class ClockWatch {
public:
    explicit ClockWatch(const ClockReading& first);
    /// What happened since the last reading.
    [[nodiscard]] ClockNews update(const ClockReading& reading);
    /// What turns stamps into UTC now. Held still through the jitter of the readings (below 1 ms),
    /// so that neighbouring stamps keep their distance to the microsecond.
    [[nodiscard]] estimator::ClockOffset offset() const { return m_offset; }

private:
    estimator::ClockOffset m_offset;
    estimator::Micros m_asleep; ///< boottime - monotonic
};

} // namespace sagitta::daemon
