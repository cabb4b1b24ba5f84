// bench_live [SECONDS]
//
// A pointer of 1000 reports/s, played through a pipe by another process: the processor time of the
// daemon's live recording (event loop, reading, movements, store) beside that of a plain blocking
// read loop on the same packets.
#include "daemon/live_pointers.hpp"
#include "daemon/logging.hpp"
#include "daemon/recording_session.hpp"
#include "estimator/hand/desk.hpp"
#include "input/event_queue.hpp"
#include "tests/bench/child.hpp"

#include <array>
#include <boost/asio/io_context.hpp>
#include <boost/asio/steady_timer.hpp>
#include <cstdio>
#include <cstdlib>
#include <ctime>
#include <fcntl.h>
#include <filesystem>
#include <fstream>
#include <linux/input.h>
#include <sys/mman.h>
#include <sys/resource.h>
#include <sys/wait.h>
#include <unistd.h>

namespace {

namespace fs = std::filesystem;
using namespace sagitta;
using bench::give_up;
using estimator::PointerIndex;

constexpr int k_reports_per_s = 1000;

/// What a reader cost between its first packet and its last.
struct Reading {
    double cpu_s = 0.0;
    double wake_ups = 0.0;
    double reads = 0.0; ///< system calls that read, those of the event loop included
    std::uint64_t presses = 0;
};

Reading spent() {
    rusage usage{};
    getrusage(RUSAGE_SELF, &usage);
    timespec cpu{};
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &cpu);
    Reading now;
    now.cpu_s = static_cast<double>(cpu.tv_sec) + static_cast<double>(cpu.tv_nsec) * 1e-9;
    now.wake_ups = static_cast<double>(usage.ru_nvcsw);
    std::ifstream io{"/proc/self/io"};
    for (std::string line; std::getline(io, line);) {
        if (line.starts_with("syscr:")) {
            now.reads = std::atof(line.c_str() + 6);
        }
    }
    return now;
}

Reading since(const Reading& begin) {
    Reading end = spent();
    end.cpu_s -= begin.cpu_s;
    end.wake_ups -= begin.wake_ups;
    end.reads -= begin.reads;
    return end;
}

/// The reports of a desk, its pauses left out: a hand that never rests.
estimator::ReportBatch reports_for(int seconds) {
    auto plan =
        estimator::hand::map_room_desk(1, 1, std::chrono::sys_days{std::chrono::days{20458}});
    for (auto& pointer : plan.pointers) {
        pointer.electronics.reports_per_s = k_reports_per_s;
    }
    plan.half_days = {PointerIndex{0}};
    const auto desk = estimator::hand::Desk::make(plan);
    if (!desk) {
        give_up(desk.error().message);
    }
    const auto wanted = static_cast<std::size_t>(seconds) * k_reports_per_s;
    estimator::ReportBatch all;
    estimator::ReportBatch batch;
    while (all.size() < wanted) {
        if (const auto read = (*desk)->next(batch); !read || batch.empty()) {
            give_up("the simulated desk ended early");
        }
        all.insert(all.end(), batch.begin(), batch.end());
    }
    all.resize(wanted);
    return all;
}

void sleep_until(timespec& moment, long after_ns) {
    moment.tv_nsec += after_ns;
    if (moment.tv_nsec >= 1'000'000'000) {
        moment.tv_nsec -= 1'000'000'000;
        ++moment.tv_sec;
    }
    clock_nanosleep(CLOCK_MONOTONIC, TIMER_ABSTIME, &moment, nullptr);
}

/// Writes a packet a millisecond, stamped as the kernel would.
void play(int fd, const estimator::ReportBatch& reports) {
    timespec moment{};
    clock_gettime(CLOCK_MONOTONIC, &moment);
    for (const estimator::Report& report : reports) {
        sleep_until(moment, 1'000'000'000 / k_reports_per_s);
        std::array<input_event, 5> packet{};
        std::size_t filled = 0;
        const auto add = [&](std::uint16_t type, std::uint16_t code, std::int32_t value) {
            packet[filled].input_event_sec = moment.tv_sec;
            packet[filled].input_event_usec = moment.tv_nsec / 1000;
            packet[filled].type = type;
            packet[filled].code = code;
            packet[filled++].value = value;
        };
        if (report.dx != 0) {
            add(EV_REL, REL_X, report.dx);
        }
        if (report.dy != 0) {
            add(EV_REL, REL_Y, report.dy);
        }
        const auto left = static_cast<estimator::ButtonSet>(estimator::Button::left);
        if ((report.pressed & left) != 0) {
            add(EV_KEY, BTN_LEFT, 1);
        }
        if ((report.released & left) != 0) {
            add(EV_KEY, BTN_LEFT, 0);
        }
        add(EV_SYN, SYN_REPORT, 0);
        if (write(fd, packet.data(), filled * sizeof(input_event)) < 0) {
            return;
        }
    }
}

Reading read_plainly(int fd) {
    std::array<input_event, 64> events;
    std::int64_t sum = 0;
    Reading result;
    const Reading begin = spent();
    for (;;) {
        const ssize_t got = read(fd, events.data(), sizeof events);
        if (got <= 0) {
            break;
        }
        for (std::size_t i = 0; i < static_cast<std::size_t>(got) / sizeof(input_event); ++i) {
            sum += events[i].value;
            result.presses += events[i].type == EV_KEY && events[i].value == 1 ? 1U : 0U;
        }
    }
    const std::uint64_t presses = result.presses;
    result = since(begin);
    result.presses = presses;
    // Kept from being optimised away.
    volatile std::int64_t kept = sum;
    static_cast<void>(kept);
    return result;
}

/// The read end of a pipe as an open pointer; it reads as a kernel pointer does.
class PipePointer final : public daemon::OpenPointer {
public:
    PipePointer(int fd, PointerIndex index) : m_fd{fd}, m_assembler{index} {}
    [[nodiscard]] int file_descriptor() const override { return m_fd; }
    [[nodiscard]] estimator::Result<void> read(estimator::ReportBatch& batch) override {
        return m_queue.read(m_fd, m_assembler, batch);
    }

private:
    int m_fd;
    input::PacketAssembler m_assembler;
    input::EventQueue m_queue;
};

class PipeDevices final : public daemon::PointerDevices {
public:
    explicit PipeDevices(int fd) : m_fd{fd} {
        m_node.node = "pipe";
        m_node.description.name = "mouse";
        m_node.readable = true;
    }
    [[nodiscard]] estimator::Result<std::vector<input::PointerNode>> list() override {
        return std::vector{m_node};
    }
    [[nodiscard]] estimator::Result<std::unique_ptr<daemon::OpenPointer>>
    open(const input::PointerNode&, PointerIndex index) override {
        return std::make_unique<PipePointer>(m_fd, index);
    }

private:
    int m_fd;
    input::PointerNode m_node;
};

Reading record_live(int fd, const fs::path& store_file, int seconds) {
    auto opened = store::Store::open(store_file, store::Mode::read_write, estimator::UtcTime{});
    if (!opened || fcntl(fd, F_SETFL, O_NONBLOCK) != 0) {
        give_up(opened ? "the pipe cannot be made non-blocking" : opened.error().message);
    }
    boost::asio::io_context loop{1};
    PipeDevices devices{fd};
    daemon::SystemClocks clocks;
    const auto log = daemon::make_logger("error", false);
    std::function<void()> turn;
    daemon::LivePointers pointers{loop, devices, [&turn] { turn(); }};
    daemon::RecordingSession session{{}, {pointers, clocks, opened->store, *log}, "bench"};
    turn = [&session] { session.turn(); };
    session.start(std::nullopt);
    boost::asio::steady_timer end{loop, std::chrono::seconds{seconds}};
    end.async_wait([&loop](const boost::system::error_code&) { loop.stop(); });
    const Reading begin = spent();
    loop.run();
    if (const auto stopped = session.stop(); !stopped) {
        give_up(stopped.error().message);
    }
    Reading result = since(begin);
    result.presses = session.status().presses;
    return result;
}

template <class Reader>
Reading with_player(const estimator::ReportBatch& reports, Reader reader) {
    int ends[2];
    if (pipe2(ends, O_CLOEXEC) != 0) {
        give_up("no pipe");
    }
    const pid_t player = fork();
    if (player == 0) {
        close(ends[0]);
        play(ends[1], reports);
        _exit(0);
    }
    close(ends[1]);
    auto* shared = static_cast<Reading*>(
        mmap(nullptr, sizeof(Reading), PROT_READ | PROT_WRITE, MAP_SHARED | MAP_ANONYMOUS, -1, 0));
    if (player < 0 || shared == MAP_FAILED) {
        give_up("no second process");
    }
    // In a process of its own, so that neither reader inherits the other's memory.
    static_cast<void>(bench::measure([&] { *shared = reader(ends[0]); }));
    close(ends[0]);
    waitpid(player, nullptr, 0);
    const Reading result = *shared;
    munmap(shared, sizeof(Reading));
    return result;
}

void show(const char* who, const Reading& reading, int seconds) {
    std::printf("  %-26s %8.2f ms CPU/s  %7.0f wake-ups/s  %7.0f reads/s  %4llu presses\n", who,
                reading.cpu_s * 1e3 / seconds, reading.wake_ups / seconds, reading.reads / seconds,
                static_cast<unsigned long long>(reading.presses));
}

} // namespace

int main(int argc, char** argv) {
    const int seconds = argc > 1 ? std::atoi(argv[1]) : 30;
    if (seconds < 1) {
        give_up("usage: bench_live [SECONDS], 1 or more");
    }
    const fs::path folder =
        fs::temp_directory_path() / ("sagitta-bench-live-" + std::to_string(getpid()));
    fs::create_directories(folder);
    const auto reports = reports_for(seconds);
    const Reading plain = with_player(reports, read_plainly);
    const Reading live = with_player(
        reports, [&](int fd) { return record_live(fd, folder / "live.db", seconds + 1); });
    std::printf("%d reports/s without a pause for %d s, through a pipe:\n\n", k_reports_per_s,
                seconds);
    show("blocking read loop", plain, seconds);
    show("live recording, all of it", live, seconds);
    std::printf("  ratio                      %8.2f\n", live.cpu_s / plain.cpu_s);
    fs::remove_all(folder);
    return 0;
}
