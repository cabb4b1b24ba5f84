// Reads what an event node holds, many events a system call.
#pragma once

#include "estimator/result.hpp"
#include "input/packet.hpp"

#include <array>
#include <linux/input.h>

namespace sagitta::input {

class EventQueue {
public:
    /// Appends the reports of what `fd` (non-blocking) holds now.
    /// @return not_found when the device has gone; io
    [[nodiscard]] estimator::Result<void> read(int fd, PacketAssembler& assembler,
                                               estimator::ReportBatch& batch);

private:
    // The kernel keeps 128 events for an ordinary mouse: one call takes them all, and its short
    // answer tells that nothing is left.
    std::array<input_event, 256> m_events;
};

} // namespace sagitta::input
