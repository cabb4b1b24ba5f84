// From kernel input events to reports: the same assembly for live pointers and recordings.
#pragma once

#include "estimator/report.hpp"

#include <cstdint>
#include <linux/input.h>
#include <span>

namespace sagitta::input {

/// Assembles the packets of one pointer. A packet ends with SYN_REPORT; packets without motion,
/// button edge or wheel step make no report.
///
/// SYN_DROPPED: everything up to and including the next SYN_REPORT is ignored, and the next
/// report carries after_loss (kernel: Documentation/input/event-codes.rst).
/// Stamps that run backwards, and deltas beyond +-32767 counts (no pointer sends more), are
/// treated as a loss too, and counted.
class PacketAssembler {
public:
    explicit PacketAssembler(estimator::PointerIndex pointer);

    /// Appends the reports completed by `events` to `batch`. A packet cut by the end of `events`
    /// is continued by the next call.
    void add(std::span<const input_event> events, estimator::ReportBatch& batch);

    [[nodiscard]] std::uint64_t drops() const { return m_drops; }
    [[nodiscard]] std::uint64_t reversed_stamps() const { return m_reversed; }
    [[nodiscard]] std::uint64_t impossible_deltas() const { return m_impossible; }
    /// An unfinished packet is waiting for its SYN_REPORT.
    [[nodiscard]] bool mid_packet() const;

private:
    estimator::PointerIndex m_pointer;
    estimator::Report m_packet;
    std::uint64_t m_drops = 0;
    std::uint64_t m_reversed = 0;
    std::uint64_t m_impossible = 0;
    // Further members as the implementation needs.
};

} // namespace sagitta::input
