// bench_replay [MILLIONS_OF_EVENTS [FOLDER]]
//
// Writes a recording of simulated desk work at 1000 reports/s, then compares, process by process
// and in one run, the CPU time of `sagitta replay` into a fresh store with that of a bare loop
// that reads the same file and sums its values. Prints both, their ratio, and the peak memory of
// a replay of a tenth of the file beside that of the whole.
#include "estimator/hand/desk.hpp"
#include "input/raw_writer.hpp"

#include <algorithm>
#include <array>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <fcntl.h>
#include <filesystem>
#include <linux/input.h>
#include <string>
#include <sys/resource.h>
#include <sys/wait.h>
#include <unistd.h>
#include <vector>

namespace {

namespace fs = std::filesystem;
using namespace sagitta;

struct Usage {
    double cpu_s;
    double peak_mib;
};

[[noreturn]] void give_up(const std::string& why) {
    std::fprintf(stderr, "bench_replay: %s\n", why.c_str());
    std::exit(1);
}

template <class Child>
Usage measure(Child child) {
    const pid_t pid = fork();
    if (pid == 0) {
        child();
        _exit(0);
    }
    int status = 0;
    rusage usage{};
    if (pid < 0 || wait4(pid, &status, 0, &usage) != pid || status != 0) {
        give_up("a measured process failed");
    }
    const auto seconds = [](const timeval& t) {
        return static_cast<double>(t.tv_sec) + static_cast<double>(t.tv_usec) * 1e-6;
    };
    return {seconds(usage.ru_utime) + seconds(usage.ru_stime),
            static_cast<double>(usage.ru_maxrss) / 1024.0};
}

void read_and_sum(const fs::path& file) {
    static std::array<input_event, 16384> events;
    const int fd = open(file.c_str(), O_RDONLY | O_CLOEXEC);
    std::int64_t sum = 0;
    for (;;) {
        const ssize_t got = read(fd, events.data(), sizeof events);
        if (got <= 0) {
            break;
        }
        const std::size_t count = static_cast<std::size_t>(got) / sizeof(input_event);
        for (std::size_t i = 0; i < count; ++i) {
            sum += events[i].value;
        }
    }
    close(fd);
    // Kept from being optimised away.
    volatile std::int64_t result = sum;
    static_cast<void>(result);
}

void replay(const std::string& sagitta_program, const fs::path& recording, const fs::path& store) {
    const int null = open("/dev/null", O_WRONLY | O_CLOEXEC);
    dup2(null, STDOUT_FILENO);
    execl(sagitta_program.c_str(), "sagitta", "replay", "--store", store.c_str(), recording.c_str(),
          nullptr);
    _exit(1);
}

/// Writes reports until the file holds `bytes`. @return the events written
std::uint64_t generate(const fs::path& file, std::uint64_t bytes) {
    auto plan =
        estimator::hand::map_room_desk(1, 200, std::chrono::sys_days{std::chrono::days{20458}});
    for (auto& pointer : plan.pointers) {
        pointer.electronics.reports_per_s = 1000.0;
    }
    plan.half_days = {estimator::PointerIndex{0}};
    auto desk = estimator::hand::Desk::make(plan);
    auto writer = input::RawWriter::create(file);
    if (!desk || !writer) {
        give_up(desk ? writer.error().message : desk.error().message);
    }
    estimator::ReportBatch batch;
    std::uint64_t written = 0;
    while (written < bytes) {
        if (const auto read = (*desk)->next(batch); !read || batch.empty()) {
            give_up("the simulated desk ended early");
        }
        if (const auto wrote = writer->write(batch, estimator::ClockOffset{}); !wrote) {
            give_up(wrote.error().message);
        }
        written = fs::file_size(file);
    }
    if (const auto closed = writer->close(); !closed) {
        give_up(closed.error().message);
    }
    return fs::file_size(file) / sizeof(input_event);
}

} // namespace

int main(int argc, char** argv) {
    const std::string program = SAGITTA_PROGRAM;
    const double millions = argc > 1 ? std::atof(argv[1]) : 50.0;
    if (!(millions > 0.0)) {
        give_up("usage: bench_replay [MILLIONS_OF_EVENTS [FOLDER]]");
    }
    const fs::path folder = (argc > 2 ? fs::path{argv[2]} : fs::temp_directory_path()) /
                            ("sagitta-bench-replay-" + std::to_string(getpid()));
    fs::remove_all(folder);
    fs::create_directories(folder);
    const fs::path whole = folder / "whole.raw";
    const fs::path tenth = folder / "tenth.raw";
    const auto bytes = static_cast<std::uint64_t>(millions * 1e6) * sizeof(input_event);
    const std::uint64_t events = generate(whole, bytes);
    fs::copy_file(whole, tenth);
    fs::resize_file(tenth, events / 10 * sizeof(input_event));

    constexpr int k_rounds = 3;
    Usage bare{1e9, 0.0};
    Usage replayed{1e9, 0.0};
    for (int round = 0; round < k_rounds; ++round) {
        const fs::path store = folder / ("store-" + std::to_string(round) + ".db");
        const Usage loop = measure([&] { read_and_sum(whole); });
        const Usage run = measure([&] { replay(program, whole, store); });
        bare.cpu_s = std::min(bare.cpu_s, loop.cpu_s);
        replayed.cpu_s = std::min(replayed.cpu_s, run.cpu_s);
        replayed.peak_mib = std::max(replayed.peak_mib, run.peak_mib);
    }
    const Usage small = measure([&] { replay(program, tenth, folder / "tenth.db"); });
    const double count = static_cast<double>(events);
    std::printf("Replay of %.1f million events (1000 reports/s) into a fresh store, least CPU time "
                "of %d rounds:\n\n",
                count * 1e-6, k_rounds);
    std::printf("  bare read-and-sum loop   %7.3f s   %7.1f million events/s\n", bare.cpu_s,
                count * 1e-6 / bare.cpu_s);
    std::printf("  sagitta replay           %7.3f s   %7.1f million events/s\n", replayed.cpu_s,
                count * 1e-6 / replayed.cpu_s);
    std::printf("  ratio                    %7.2f\n", replayed.cpu_s / bare.cpu_s);
    std::printf("  peak memory              %7.1f MiB; of a tenth of the file %.1f MiB\n",
                replayed.peak_mib, small.peak_mib);
    fs::remove_all(folder);
    return 0;
}
