// bench_memory [WEEKS [IDLE_SECONDS]]
//
// Memory of a recording: pipeline, recorder and store, driven as by the daemon through simulated
// weeks of desk work in this process, whose resident memory is read as it goes. Then the real
// sagittad without a pointer: its memory, and how often it wakes.
#include "daemon/logging.hpp"
#include "daemon/recording_session.hpp"
#include "estimator/hand/desk.hpp"
#include "tests/bench/child.hpp"

#include <chrono>
#include <csignal>
#include <cstdio>
#include <cstdlib>
#include <fcntl.h>
#include <filesystem>
#include <fstream>
#include <sys/wait.h>
#include <thread>
#include <unistd.h>

namespace {

namespace fs = std::filesystem;
using namespace sagitta;
using bench::give_up;
using estimator::Micros;
using estimator::PointerIndex;

/// A number of /proc/PID/status.
double status_of(pid_t pid, const std::string& field) {
    std::ifstream file{"/proc/" + std::to_string(pid) + "/status"};
    for (std::string line; std::getline(file, line);) {
        if (line.starts_with(field + ":")) {
            return std::atof(line.c_str() + field.size() + 1);
        }
    }
    give_up("/proc tells no " + field + " of process " + std::to_string(pid));
}

struct Memory {
    double resident, own; ///< MiB; own: without pages of files, such as libraries

    static Memory of(pid_t pid) {
        return {status_of(pid, "VmRSS") / 1024.0, status_of(pid, "RssAnon") / 1024.0};
    }
};

void show(const std::string& when, const Memory& memory) {
    std::printf("  %-34s %6.1f MiB resident, %5.1f MiB of them its own\n", when.c_str(),
                memory.resident, memory.own);
}

/// The simulated desk, a day in small batches.
class DeskFeed final : public daemon::PointerFeed {
public:
    explicit DeskFeed(estimator::hand::Desk& desk) : m_desk{desk} {}

    estimator::Result<void> next(estimator::ReportBatch& batch) override {
        auto read = m_desk.next(batch);
        m_ended = batch.empty();
        return read;
    }
    [[nodiscard]] bool ended() const { return m_ended; }
    std::span<const estimator::PointerDescription> pointers() const override {
        return m_desk.pointers();
    }
    std::vector<daemon::PointerChange> take_changes() override {
        std::vector<daemon::PointerChange> changes;
        for (; m_told < pointers().size(); ++m_told) {
            changes.push_back(
                {daemon::PointerChange::Kind::plugged, static_cast<PointerIndex>(m_told), {}});
        }
        return changes;
    }
    void enable(bool) override {}
    void set_filter(Filter) override {}
    std::vector<std::string> refused() const override { return {}; }
    bool is_open(PointerIndex) const override { return true; }

private:
    estimator::hand::Desk& m_desk;
    std::size_t m_told = 0;
    bool m_ended = false;
};

class DeskClocks final : public daemon::Clocks {
public:
    explicit DeskClocks(const estimator::hand::Desk& desk) : m_desk{desk} {}
    daemon::ClockReading read() override {
        const auto now = m_desk.now();
        return {now, estimator::PointerTime{now.time_since_epoch()}, now.time_since_epoch()};
    }

private:
    const estimator::hand::Desk& m_desk;
};

void record_weeks(const fs::path& folder, int weeks) {
    const std::chrono::sys_days monday{std::chrono::days{20458}}; // 2026-01-05
    const auto desk = estimator::hand::Desk::make(estimator::hand::map_room_desk(1, weeks, monday));
    auto opened = store::Store::open(folder / "weeks.db", store::Mode::read_write, monday);
    if (!desk || !opened) {
        give_up(desk ? opened.error().message : desk.error().message);
    }
    DeskFeed feed{**desk};
    DeskClocks clocks{**desk};
    const auto log = daemon::make_logger("error", false);
    daemon::RecordingSession session{{}, {feed, clocks, opened->store, *log}, "bench"};
    session.start(std::nullopt);
    session.turn(); // meets the pointers

    std::printf(
        "A recording of simulated work, weeks: %d (the simulation's own memory counts too):\n",
        weeks);
    show("at the start", Memory::of(getpid()));
    auto flushed = clocks.read().realtime;
    auto day = std::chrono::floor<std::chrono::days>(flushed);
    int days = 0;
    while (!feed.ended()) {
        session.turn();
        const auto now = clocks.read().realtime;
        if (now - flushed >= std::chrono::minutes{1}) {
            session.flush_in_time();
            flushed = now;
        }
        if (std::chrono::floor<std::chrono::days>(now) > day) {
            day = std::chrono::floor<std::chrono::days>(now);
            if (++days % 7 == 1) {
                show("after day " + std::to_string(days), Memory::of(getpid()));
            }
        }
    }
    if (const auto stopped = session.stop(); !stopped) {
        give_up(stopped.error().message);
    }
    const auto presses = session.status().presses;
    show("at the end", Memory::of(getpid()));
    std::printf("  %llu presses recorded\n\n", static_cast<unsigned long long>(presses));
}

/// Times that it woke, of its own will or not.
double wake_ups(pid_t pid) {
    return status_of(pid, "voluntary_ctxt_switches") + status_of(pid, "nonvoluntary_ctxt_switches");
}

void idle(const fs::path& folder, int seconds) {
    const fs::path store = folder / "idle.db";
    std::fflush(stdout);
    const pid_t pid = fork();
    if (pid == 0) {
        setenv("XDG_RUNTIME_DIR", folder.c_str(), 1);
        setenv("XDG_CONFIG_HOME", folder.c_str(), 1);
        const int null = open("/dev/null", O_WRONLY | O_CLOEXEC);
        dup2(null, STDERR_FILENO);
        execl(SAGITTAD_PROGRAM, "sagittad", "--store", store.c_str(), nullptr);
        _exit(127);
    }
    // The start's own batch is written after a minute.
    std::this_thread::sleep_for(std::chrono::seconds{62});
    const Memory memory = Memory::of(pid);
    const double before = wake_ups(pid);
    std::this_thread::sleep_for(std::chrono::seconds{seconds});
    const double woken = wake_ups(pid) - before;
    std::printf("sagittad without motion:\n");
    show("a minute after the start", memory);
    std::printf("  woke %.0f times in %d s\n", woken, seconds);
    kill(pid, SIGTERM);
    int status = 0;
    if (waitpid(pid, &status, 0) != pid || status != 0) {
        give_up("sagittad did not stop cleanly");
    }
}

} // namespace

int main(int argc, char** argv) {
    const int weeks = argc > 1 ? std::atoi(argv[1]) : 1;
    const int seconds = argc > 2 ? std::atoi(argv[2]) : 30;
    if (weeks < 1 || seconds < 1) {
        give_up("usage: bench_memory [WEEKS [IDLE_SECONDS]], each 1 or more");
    }
    setvbuf(stdout, nullptr, _IOLBF, 0);
    const fs::path folder =
        fs::temp_directory_path() / ("sagitta-bench-memory-" + std::to_string(getpid()));
    fs::create_directories(folder);
    record_weeks(folder, weeks);
    idle(folder, seconds);
    fs::remove_all(folder);
    return 0;
}
