// How long a moving pointer may be left alone between two readings: as long as the kernel's buffer
// stays half empty. Pure; one object per pointer, in the event loop's thread.
#pragma once

#include "estimator/report.hpp"
#include "estimator/units.hpp"

#include <array>
#include <optional>
#include <span>

namespace sagitta::daemon {

/// The kernel buffers 128 events of an ordinary mouse (drivers/input/evdev.c:
/// evdev_compute_buffer_size, input.c: input_estimate_events_per_packet); a packet of two axes, a
/// button and SYN_REPORT has four.
constexpr int k_buffer_events = 128;
constexpr int k_packet_events = 4;
/// Reports that fill half of it.
constexpr int k_batch_reports = k_buffer_events / k_packet_events / 2;

/// Interval of the fastest pointers (8000 reports/s; common practice, no source). It is assumed
/// until the pointer has shown its own.
constexpr estimator::Micros k_fastest_interval{125};
constexpr estimator::Micros k_shortest_period = k_batch_reports * k_fastest_interval;
constexpr estimator::Micros k_longest_period = std::chrono::milliseconds{32};

/// Learns a pointer's report interval. A slow hand leaves polls without a report, so the time
/// between reports says little by itself; but reports of two counts and more come at every poll.
/// The median of eight intervals between those is taken, so that neither jitter nor a late report
/// nor a rest counts.
class BatchRhythm {
public:
    /// @param reports  of this pointer, in the order of time, following those of the last call
    void learn(std::span<const estimator::Report> reports);
    /// Nothing until a fast enough movement was seen.
    [[nodiscard]] std::optional<estimator::Micros> report_interval() const { return m_interval; }
    /// Time to wait before the next reading, in [k_shortest_period, k_longest_period].
    [[nodiscard]] estimator::Micros period() const;

private:
    void learn_window();

    std::optional<estimator::Micros> m_interval;
    std::optional<estimator::PointerTime> m_last_fast; ///< a report of two counts, just before
    std::array<estimator::Micros, 8> m_window{};
    std::size_t m_filled = 0;
};

} // namespace sagitta::daemon
