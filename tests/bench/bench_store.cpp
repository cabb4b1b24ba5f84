// bench_store [MILLIONS_OF_MOVEMENTS [FOLDER]]
//
// Stores days of simulated desk work until there are 2 million movements, and measures the
// promises on the store: bytes a movement (100 at most), syncs a minute of work (1 at most), and
// `sagitta week` (100 ms at most, whatever the age of the file). Then export and check.
#include "tests/bench/child.hpp"
#include "tests/bench/desk_day.hpp"

#include <algorithm>
#include <cstdio>
#include <cstdlib>
#include <ctime>
#include <filesystem>
#include <sys/syscall.h>
#include <unistd.h>

namespace {

std::uint64_t g_syncs = 0; ///< fsync and fdatasync of this process

}

// The dynamic linker gives SQLite these instead of the C library's.
extern "C" __attribute__((visibility("default"), used)) int fsync(int fd) {
    ++g_syncs;
    return static_cast<int>(syscall(SYS_fsync, fd));
}
extern "C" __attribute__((visibility("default"), used)) int fdatasync(int fd) {
    ++g_syncs;
    return static_cast<int>(syscall(SYS_fdatasync, fd));
}

namespace {

namespace fs = std::filesystem;
using namespace sagitta;
using namespace sagitta::bench;
using estimator::Micros;
using estimator::PointerIndex;
using estimator::UtcTime;

double cpu_now_s() {
    timespec time{};
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &time);
    return static_cast<double>(time.tv_sec) + static_cast<double>(time.tv_nsec) * 1e-9;
}

/// A store and what writes to it.
class Writer {
public:
    Writer(const fs::path& file, const DeskDays& days)
        : m_days{days}, m_store{open(file)}, m_recorder{&m_store, {}} {
        for (std::size_t i = 0; i < days.pointers.size(); ++i) {
            const auto id = m_store.pointer(days.pointers[i],
                                            estimator::calibrate(days.pointers[i], std::nullopt,
                                                                 estimator::CpiSource::config,
                                                                 estimator::Gain::unity()),
                                            days.first_day);
            if (!id) {
                give_up(id.error().message);
            }
            m_recorder.set_pointer(static_cast<PointerIndex>(i), *id);
        }
    }

    /// Stores one of the days as day number `day` after the first. @return its movements
    std::size_t store_day(int day) {
        const DeskDay& work = begin_day(day);
        for (const Finding& finding : work.findings) {
            repeat(finding, m_recorder);
            if (m_recorder.full()) {
                flush();
            }
        }
        flush();
        return work.movements;
    }

    /// The same in the rhythm of a daemon: what waits is written a minute after it began to.
    /// @return minutes from the first to the last finding
    double store_day_live(int day) {
        const DeskDay& work = begin_day(day);
        auto due = time_of(work.findings.front()) + std::chrono::minutes{1};
        for (const Finding& finding : work.findings) {
            if (time_of(finding) >= due || m_recorder.full()) {
                flush();
                due = time_of(finding) + std::chrono::minutes{1};
            }
            repeat(finding, m_recorder);
        }
        flush();
        return estimator::seconds(time_of(work.findings.back()) - time_of(work.findings.front())) /
               60.0;
    }

private:
    static store::Store open(const fs::path& file) {
        auto opened = store::Store::open(file, store::Mode::read_write, UtcTime{});
        if (!opened) {
            give_up(opened.error().message);
        }
        return std::move(opened->store);
    }

    const DeskDay& begin_day(int day) {
        const auto count = m_days.days.size();
        const DeskDay& work = m_days.days[static_cast<std::size_t>(day) % count];
        const auto simulated = std::chrono::floor<std::chrono::days>(
            time_of(work.findings.front()).time_since_epoch());
        const auto wanted = m_days.first_day.time_since_epoch() + std::chrono::days{day};
        m_recorder.set_clock({wanted - simulated});
        return work;
    }

    void flush() {
        if (const auto written = m_recorder.flush(); !written) {
            give_up(written.error().message);
        }
    }

    const DeskDays& m_days;
    store::Store m_store;
    store::Recorder m_recorder;
};

std::string date(std::chrono::sys_days day) {
    const std::chrono::year_month_day ymd{day};
    char text[32];
    std::snprintf(text, sizeof text, "%04d-%02u-%02u", static_cast<int>(ymd.year()),
                  static_cast<unsigned>(ymd.month()), static_cast<unsigned>(ymd.day()));
    return text;
}

/// Least of several runs, after one that warms the caches.
Cost run(std::vector<std::string> arguments, int rounds) {
    arguments.insert(arguments.begin(), SAGITTA_PROGRAM);
    Cost least{1e9, 1e9, 0};
    for (int round = 0; round < rounds; ++round) {
        const Cost cost = measure_program(arguments);
        if (cost.exit_code != 0 && arguments[1] != "check") {
            give_up("sagitta " + arguments[1] + " failed");
        }
        least = {std::min(least.wall_s, cost.wall_s), std::min(least.cpu_s, cost.cpu_s),
                 cost.exit_code};
    }
    return least;
}

void show_week(const char* which, const fs::path& store, std::chrono::sys_days ending) {
    const Cost cost = run({"week", "--store", store, "--ending", date(ending)}, 5);
    std::printf("  %-34s %7.1f ms   %7.1f ms CPU\n", which, cost.wall_s * 1e3, cost.cpu_s * 1e3);
}

void show_live_day(const fs::path& file, const DeskDays& days) {
    Writer writer{file, days};
    const std::uint64_t before = g_syncs;
    const double cpu = cpu_now_s();
    double minutes = 0.0;
    constexpr int k_days = 10;
    for (int day = 0; day < k_days; ++day) {
        minutes += writer.store_day_live(day);
    }
    const auto syncs = static_cast<double>(g_syncs - before);
    std::printf("A daemon's rhythm, %d days of work, a batch a minute:\n", k_days);
    std::printf("  syncs                   %8.3f a minute of work (%.0f in %.0f min)\n",
                syncs / minutes, syncs, minutes);
    std::printf("  CPU of writing          %8.2f s a day\n\n", (cpu_now_s() - cpu) / k_days);
}

} // namespace

int main(int argc, char** argv) {
    const double millions = argc > 1 ? std::atof(argv[1]) : 2.0;
    if (!(millions > 0.0)) {
        give_up("usage: bench_store [MILLIONS_OF_MOVEMENTS [FOLDER]]");
    }
    const fs::path folder = (argc > 2 ? fs::path{argv[2]} : fs::temp_directory_path()) /
                            ("sagitta-bench-store-" + std::to_string(getpid()));
    fs::create_directories(folder);
    setenv("XDG_CONFIG_HOME", folder.c_str(), 1); // the defaults hold
    setenv("TZ", "UTC", 1);

    const DeskDays days = simulate_days(2);
    std::size_t cycle = 0;
    for (const DeskDay& day : days.days) {
        cycle += day.movements;
    }
    if (cycle == 0) {
        give_up("the simulated desk made no movement");
    }
    show_live_day(folder / "live.db", days);

    // A day holds so much work; the promised number of movements says how many days there are.
    const auto wanted = static_cast<std::size_t>(millions * 1e6);
    const fs::path whole = folder / "whole.db";
    const fs::path tenth = folder / "tenth.db";
    std::size_t stored = 0;
    int last_day = 0;
    double cpu = cpu_now_s();
    {
        Writer writer{whole, days};
        while (stored < wanted) {
            stored += writer.store_day(last_day++);
        }
    }
    cpu = cpu_now_s() - cpu;
    const int first_of_tenth = last_day - last_day / 10;
    {
        Writer writer{tenth, days};
        for (int day = first_of_tenth; day < last_day; ++day) {
            static_cast<void>(writer.store_day(day));
        }
    }
    const auto bytes = static_cast<double>(fs::file_size(whole));
    const auto count = static_cast<double>(stored);
    std::printf("A store of %.2f million movements over %d days, %zu pointers, %.1f MB:\n",
                count * 1e-6, last_day, days.pointers.size(), bytes * 1e-6);
    std::printf("  file                    %8.1f bytes a movement, all included\n", bytes / count);
    std::printf("  CPU of storing          %8.1f us a movement, in batches of 256\n\n",
                cpu / count * 1e6);

    const auto end = days.first_day + std::chrono::days{last_day - 1};
    std::printf("sagitta week, least of 5 runs:\n");
    show_week("last week", whole, end);
    show_week("week in the middle", whole, days.first_day + std::chrono::days{last_day / 2});
    show_week("last week, a tenth of the days", tenth, end);

    const Cost rows = run({"export", "--store", whole, "--format", "csv"}, 1);
    std::printf("\nsagitta export, csv     %8.2f million rows/s (%.2f s, %.2f s CPU)\n",
                count * 1e-6 / rows.wall_s, rows.wall_s, rows.cpu_s);
    const Cost check = run({"check", "--store", whole}, 1);
    std::printf("sagitta check           %8.2f s, %.2f s CPU\n", check.wall_s, check.cpu_s);
    fs::remove_all(folder);
    return 0;
}
