#include "input/raw_writer.hpp"

#include "input/file.hpp"

#include <array>
#include <cerrno>
#include <fcntl.h>
#include <linux/input.h>
#include <sys/stat.h>
#include <unistd.h>
#include <vector>

namespace sagitta::input {

using estimator::fail;
using estimator::Report;
using estimator::Result;

namespace {
constexpr std::size_t k_buffer_events = 4096;
}

struct RawWriter::State {
    State(Descriptor opened, std::filesystem::path path)
        : file{std::move(opened)}, name{std::move(path)} {
        events.reserve(k_buffer_events);
    }

    /// Adds the events of one packet.
    void take(const Report& report, estimator::ClockOffset clock) {
        const auto utc = clock.to_utc(report.time).time_since_epoch();
        const auto seconds = std::chrono::floor<std::chrono::seconds>(utc);
        const auto put = [&](std::uint16_t type, std::uint16_t code, std::int32_t value) {
            input_event event{};
            event.input_event_sec = seconds.count();
            event.input_event_usec = (utc - seconds).count();
            event.type = type;
            event.code = code;
            event.value = value;
            events.push_back(event);
        };
        if (report.after_loss) {
            put(EV_SYN, SYN_DROPPED, 0);
            put(EV_SYN, SYN_REPORT, 0);
        }
        for (std::uint16_t bit = 0; bit < 8; ++bit) {
            const auto code = static_cast<std::uint16_t>(BTN_LEFT + bit);
            if ((report.pressed >> bit & 1) != 0)
                put(EV_KEY, code, 1);
            if ((report.released >> bit & 1) != 0)
                put(EV_KEY, code, 0);
        }
        if (report.dx != 0)
            put(EV_REL, REL_X, report.dx);
        if (report.dy != 0)
            put(EV_REL, REL_Y, report.dy);
        if (report.wheel_120ths != 0)
            put(EV_REL, REL_WHEEL_HI_RES, report.wheel_120ths);
        put(EV_SYN, SYN_REPORT, 0);
    }

    /// A failure ends the recording: the file is closed.
    Result<void> flush() {
        const auto bytes = std::as_bytes(std::span{events});
        std::size_t written = 0;
        while (written < bytes.size()) {
            const ssize_t done =
                ::write(file.get(), bytes.data() + written, bytes.size() - written);
            const int error = errno;
            if (done < 0 && error == EINTR)
                continue;
            if (done < 0) {
                // A half-written event must not be followed by more.
                file = Descriptor{-1};
                events.clear();
                return fail(code_of_errno(error), "cannot write the recording " + shown(name) +
                                                      ": " + text_of_errno(error) +
                                                      "; what was written before is kept");
            }
            written += static_cast<std::size_t>(done);
        }
        events.clear();
        return {};
    }

    Descriptor file;
    std::filesystem::path name;
    std::vector<input_event> events; ///< not yet written
};

Result<RawWriter> RawWriter::create(const std::filesystem::path& file) {
    Descriptor opened{
        ::open(file.c_str(), O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, S_IRUSR | S_IWUSR)};
    const int error = errno;
    if (opened.get() < 0)
        return fail(code_of_errno(error), "cannot create the recording " + shown(file) + ": " +
                                              text_of_errno(error) +
                                              "; choose another name or folder");
    return RawWriter{std::make_unique<State>(std::move(opened), file)};
}

RawWriter::RawWriter(std::unique_ptr<State> state) : m_state{std::move(state)} {}
RawWriter::RawWriter(RawWriter&&) noexcept = default;
RawWriter& RawWriter::operator=(RawWriter&&) noexcept = default;

RawWriter::~RawWriter() {
    if (m_state && m_state->file.get() >= 0)
        (void)m_state->flush();
}

Result<void> RawWriter::write(std::span<const Report> reports, estimator::ClockOffset clock) {
    for (const Report& report : reports) {
        m_state->take(report, clock);
        if (m_state->events.size() < k_buffer_events)
            continue;
        if (const auto flushed = m_state->flush(); !flushed)
            return flushed;
    }
    return {};
}

Result<void> RawWriter::close() {
    if (const auto flushed = m_state->flush(); !flushed)
        return flushed;
    const int closed = ::close(m_state->file.release());
    const int error = errno;
    if (closed != 0)
        return fail(code_of_errno(error), "cannot finish the recording " + shown(m_state->name) +
                                              ": " + text_of_errno(error));
    return {};
}

} // namespace sagitta::input
