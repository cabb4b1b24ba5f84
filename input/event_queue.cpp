#include "input/event_queue.hpp"

#include "input/file.hpp"

#include <cerrno>
#include <unistd.h>

namespace sagitta::input {

using estimator::ErrorCode;

estimator::Result<void> EventQueue::read(int fd, PacketAssembler& assembler,
                                         estimator::ReportBatch& batch) {
    // Bounded, so that a device that never stops cannot hold up the others.
    constexpr int k_most_calls = 16;
    for (int call = 0; call < k_most_calls; ++call) {
        const ssize_t got = ::read(fd, m_events.data(), sizeof m_events);
        const int error = errno;
        if (got < 0 && error == EINTR)
            continue;
        if (got < 0 && error == EAGAIN)
            return {};
        if (got == 0 || (got < 0 && error == ENODEV))
            return estimator::fail(ErrorCode::not_found, "it was unplugged or taken away");
        if (got < 0)
            return estimator::fail(ErrorCode::io, text_of_errno(error));
        const std::size_t events = static_cast<std::size_t>(got) / sizeof(input_event);
        assembler.add(std::span{m_events}.first(events), batch);
        if (events < m_events.size())
            return {};
    }
    return {};
}

} // namespace sagitta::input
