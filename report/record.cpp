#include "report/record.hpp"

#include "input/evdev_pointers.hpp"
#include "input/raw_writer.hpp"
#include "report/numbers.hpp"
#include "report/progress.hpp"
#include "report/table.hpp"

#include <algorithm>
#include <array>
#include <cerrno>
#include <csignal>
#include <cstring>
#include <fmt/format.h>
#include <memory>
#include <nlohmann/json.hpp>
#include <poll.h>
#include <sys/signalfd.h>
#include <unistd.h>

namespace sagitta::report {
namespace {

using estimator::ErrorCode;
using estimator::fail;
using Clock = std::chrono::steady_clock;

/// SIGINT and SIGTERM as a file descriptor, for as long as it lives.
class StopSignal {
public:
    StopSignal() {
        sigset_t signals;
        sigemptyset(&signals);
        sigaddset(&signals, SIGINT);
        sigaddset(&signals, SIGTERM);
        pthread_sigmask(SIG_BLOCK, &signals, &m_before);
        m_fd = signalfd(-1, &signals, SFD_CLOEXEC | SFD_NONBLOCK);
    }
    ~StopSignal() {
        // A signal still pending has been obeyed: it must not kill once unblocked.
        std::array<signalfd_siginfo, 4> pending{};
        if (m_fd >= 0) {
            while (::read(m_fd, pending.data(), sizeof(pending)) > 0) {
            }
            ::close(m_fd);
        }
        pthread_sigmask(SIG_SETMASK, &m_before, nullptr);
    }
    StopSignal(const StopSignal&) = delete;
    StopSignal& operator=(const StopSignal&) = delete;
    [[nodiscard]] int file_descriptor() const { return m_fd; }

private:
    sigset_t m_before{};
    int m_fd = -1;
};

estimator::ClockOffset clock_offset_now() {
    timespec monotonic{};
    timespec utc{};
    clock_gettime(CLOCK_MONOTONIC, &monotonic);
    clock_gettime(CLOCK_REALTIME, &utc);
    const auto micros = [](const timespec& time) {
        return estimator::Micros{static_cast<std::int64_t>(time.tv_sec) * 1'000'000 +
                                 time.tv_nsec / 1000};
    };
    return {micros(utc) - micros(monotonic)};
}

std::string names_of(const std::vector<input::PointerNode>& nodes) {
    std::string names;
    for (const input::PointerNode& node : nodes) {
        names += fmt::format("{}'{}' ({})", names.empty() ? "" : ", ",
                             printable(node.description.name), node.node.string());
    }
    return names;
}

Result<input::PointerNode> choose(const std::vector<input::PointerNode>& nodes,
                                  const std::optional<std::string>& wanted) {
    std::vector<input::PointerNode> fitting;
    for (const input::PointerNode& node : nodes) {
        if (!wanted || node.node == *wanted || node.description.name == *wanted) {
            fitting.push_back(node);
        }
    }
    if (fitting.empty() && wanted) {
        std::copy_if(nodes.begin(), nodes.end(), std::back_inserter(fitting),
                     [&](const input::PointerNode& node) {
                         return node.description.name.find(*wanted) != std::string::npos;
                     });
    }
    if (fitting.size() == 1) {
        return fitting.front();
    }
    if (nodes.empty()) {
        return fail(ErrorCode::not_found, "this machine shows no pointer; plug one in and see "
                                          "'sagitta devices'");
    }
    if (fitting.empty()) {
        return fail(ErrorCode::not_found,
                    fmt::format("no pointer is called '{}'; this machine has {}",
                                printable(*wanted), names_of(nodes)));
    }
    return fail(
        ErrorCode::bad_value,
        fmt::format("several pointers fit; name one with --pointer: {}", names_of(fitting)));
}

/// Copies reports until a stop signal, the end of the time, or the pointer's leaving.
class Recording {
public:
    Recording(input::EvdevPointer pointer, input::RawWriter writer)
        : m_pointer{std::move(pointer)}, m_writer{std::move(writer)} {}

    Result<void> run(const RecordRequest& request, const Session& session);
    [[nodiscard]] std::uint64_t reports() const { return m_reports; }
    [[nodiscard]] bool unplugged() const { return m_unplugged; }

private:
    /// @return whether to go on
    Result<bool> turn(const StopSignal& stop, int timeout_ms);

    input::EvdevPointer m_pointer;
    input::RawWriter m_writer;
    estimator::ReportBatch m_batch;
    std::uint64_t m_reports = 0;
    bool m_unplugged = false;
};

Result<bool> Recording::turn(const StopSignal& stop, int timeout_ms) {
    std::array<pollfd, 2> sources = {pollfd{m_pointer.file_descriptor(), POLLIN, 0},
                                     pollfd{stop.file_descriptor(), POLLIN, 0}};
    if (::poll(sources.data(), sources.size(), timeout_ms) < 0) {
        const int error = errno;
        if (error != EINTR) {
            return fail(ErrorCode::io, fmt::format("waiting for the pointer failed: {}; try again",
                                                   std::strerror(error)));
        }
    }
    if (sources[0].revents != 0) {
        m_batch.clear();
        if (const auto read = m_pointer.read(m_batch); !read) {
            if (read.error().code != ErrorCode::not_found) {
                return tl::unexpected{read.error()};
            }
            m_unplugged = true;
        }
        if (const auto written = m_writer.write(m_batch, clock_offset_now()); !written) {
            return tl::unexpected{written.error()};
        }
        m_reports += m_batch.size();
    }
    return !m_unplugged && sources[1].revents == 0;
}

Result<void> Recording::run(const RecordRequest& request, const Session& session) {
    const StopSignal stop;
    Progress progress{session.show_progress};
    const auto begin = Clock::now();
    for (bool going = true; going;) {
        int timeout_ms = session.show_progress ? 500 : -1;
        if (request.length) {
            const auto left = *request.length - (Clock::now() - begin);
            if (left <= left.zero()) {
                break;
            }
            const double left_ms = std::chrono::duration<double, std::milli>(left).count() + 1.0;
            const int left_whole_ms = static_cast<int>(std::min(left_ms, 1e6));
            timeout_ms = timeout_ms < 0 ? left_whole_ms : std::min(timeout_ms, left_whole_ms);
        }
        const auto turned = turn(stop, timeout_ms);
        if (!turned) {
            return tl::unexpected{turned.error()};
        }
        going = *turned;
        if (progress.due()) {
            progress.say(
                fmt::format("recording: {}; Ctrl-C ends it", count_of(m_reports, "report")));
        }
    }
    return m_writer.close();
}

} // namespace

Result<Output> run_record(const RecordRequest& request, const Session& session) {
    const auto nodes = input::list_pointers();
    if (!nodes) {
        return tl::unexpected{nodes.error()};
    }
    const auto node = choose(*nodes, request.pointer);
    if (!node) {
        return tl::unexpected{node.error()};
    }
    auto pointer = input::EvdevPointer::open(*node, estimator::PointerIndex{0});
    if (!pointer) {
        return tl::unexpected{pointer.error()};
    }
    auto writer = input::RawWriter::create(request.file);
    if (!writer) {
        return tl::unexpected{writer.error()};
    }
    Recording recording{std::move(*pointer), std::move(*writer)};
    if (const auto done = recording.run(request, session); !done) {
        return tl::unexpected{done.error()};
    }
    if (session.json) {
        const nlohmann::ordered_json json = {{"file", request.file.string()},
                                             {"pointer", printable(node->description.name)},
                                             {"reports", recording.reports()},
                                             {"unplugged", recording.unplugged()}};
        return Output{json.dump(2, ' ', false, nlohmann::json::error_handler_t::replace) + "\n"};
    }
    return Output{wrapped(fmt::format("{}{} of {} recorded in {}.",
                                      recording.unplugged() ? "The pointer was unplugged. " : "",
                                      count_of(recording.reports(), "report"),
                                      printable(node->description.name), request.file.string()))};
}

} // namespace sagitta::report
