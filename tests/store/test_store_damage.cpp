#include "store/damage.hpp"
#include "support.hpp"

#include <algorithm>
#include <csignal>
#include <doctest/doctest.h>
#include <sys/wait.h>
#include <unistd.h>

using namespace sagitta;
using namespace sagitta::store;
using namespace sagitta::store::test;
namespace fs = std::filesystem;
using Names = std::vector<std::string>;

namespace {

const std::string k_dated = "sagitta.db.damaged-2026-12-01T080000Z";

/// The bytes of a closed store with some of everything.
std::string small_store(const fs::path& file, std::size_t movements) {
    {
        auto store = open_fresh(file).store;
        auto batch = batch_of(EverydayMovements{upright_mouse(store), k_monday}.take(movements));
        batch.events.push_back({k_monday, EventKind::started, std::nullopt, "0.1.0"});
        REQUIRE(store.append(batch));
    }
    return read_bytes(file);
}

/// Reads everything; @return false when any of it is refused as damaged.
bool reads_clean(const Store& store) {
    const auto good = [](const auto& result) {
        CHECK((result || result.error().code == ErrorCode::damaged));
        return result.has_value();
    };
    bool clean = good(store.pointers());
    clean = good(store.conditions()) && clean;
    clean = good(store.for_each_movement({}, [](const StoredMovement&) {})) && clean;
    clean = good(store.for_each_hour({}, [](const StoredHour&) {})) && clean;
    clean = good(store.events({})) && clean;
    return good(store.last_hour()) && clean;
}

void check_set_aside(const fs::path& file, const std::string& damaged_bytes) {
    auto opened = open_fresh(file);
    REQUIRE(opened.set_aside);
    CHECK(read_bytes(*opened.set_aside) == damaged_bytes);
    CHECK(all_movements(opened.store).empty());
    const auto events = opened.store.events({});
    REQUIRE(events);
    REQUIRE(events->size() == 1);
    CHECK(events->front().kind == EventKind::set_aside);
    CHECK(events->front().detail == opened.set_aside->filename());
    REQUIRE(opened.store.append(
        batch_of(EverydayMovements{upright_mouse(opened.store), k_monday}.take(3))));
}

} // namespace

TEST_CASE("a store cut at any byte is refused for reading unchanged, and set aside for writing") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    const auto whole = small_store(file, 30);
    std::vector<std::size_t> sizes{1, 15, 16, 17, 27, 28, 59, 99, 100, 101, 511, 512, 4095, 4096};
    for (std::size_t size = 4097; size < whole.size(); size += 4099) {
        sizes.push_back(size);
    }
    sizes.push_back(whole.size() - 1);
    for (const auto size : sizes) {
        CAPTURE(size);
        const auto cut = whole.substr(0, size);
        write_bytes(file, cut);
        const auto read = open_to_read(file);
        REQUIRE_FALSE(read);
        CHECK(read.error().code == ErrorCode::damaged);
        REQUIRE(read_bytes(file) == cut);
        check_set_aside(file, cut);
    }
}

TEST_CASE("every length below the whole is seen as damage before SQLite opens the file") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    const auto whole = small_store(file, 1);
    std::size_t seen = 0;
    for (std::size_t size = whole.size() - 1; size > 0; --size) {
        REQUIRE(truncate(file.c_str(), static_cast<off_t>(size)) == 0);
        const auto state = inspect(file);
        seen += !state && state.error().code == ErrorCode::damaged ? 1U : 0U;
    }
    CHECK(seen == whole.size() - 1);
    REQUIRE(truncate(file.c_str(), 0) == 0);
    CHECK(inspect(file).value() == FileState::empty);
}

TEST_CASE("garbage is set aside under a dated name, never over an older one") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    for (const auto& garbage :
         {std::string(5000, '\0'), std::string{"not a store"}, std::string(70'000, 'x')}) {
        write_bytes(file, garbage);
        check_set_aside(file, garbage);
    }
    CHECK(names_in(folder.path()) == Names{"sagitta.db", k_dated, k_dated + "-2", k_dated + "-3"});
    CHECK(read_bytes(folder / k_dated) == std::string(5000, '\0'));
}

TEST_CASE("the log of a damaged file moves along with it") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    write_bytes(file, std::string(5000, 'x'));
    write_bytes(folder / "sagitta.db-wal", "log");
    const auto read = open_to_read(file);
    REQUIRE_FALSE(read);
    CHECK(names_in(folder.path()) == Names{"sagitta.db", "sagitta.db-wal"});
    check_set_aside(file, std::string(5000, 'x'));
    CHECK(read_bytes(folder / (k_dated + "-wal")) == "log");
}

TEST_CASE("a byte changed anywhere gives rows, or damage, or a refusal, and never a crash") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    const auto whole = small_store(file, 30);
    std::size_t found = 0;
    for (std::size_t at = 0; at < whole.size(); at += at < 100 ? 1 : 1999) {
        CAPTURE(at);
        auto bytes = whole;
        bytes[at] = static_cast<char>(bytes[at] ^ 0x55);
        write_bytes(file, bytes);
        {
            const auto opened = open_to_read(file);
            if (!opened || !reads_clean(opened->store)) {
                ++found;
            }
        }
        REQUIRE(read_bytes(file) == bytes);
        auto written = Store::open(file, Mode::read_write, k_monday);
        if (written) {
            auto batch =
                batch_of(EverydayMovements{upright_mouse(written->store), k_monday + 48h}.take(2));
            const auto appended = written->store.append(batch);
            CHECK((appended || appended.error().code == ErrorCode::damaged));
        } else {
            CAPTURE(written.error().message);
            CHECK((written.error().code == ErrorCode::newer_version ||
                   written.error().code == ErrorCode::bad_format));
        }
        for (const auto& name : names_in(folder.path())) {
            fs::remove(folder / name);
        }
    }
    CHECK(found > 15);
}

TEST_CASE(
    "damage in the middle of a large file is found when it is read, or thoroughly on opening") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    {
        auto store = open_fresh(file).store;
        Batch batch;
        batch.movements = EverydayMovements{upright_mouse(store), k_monday}.take(12'500);
        REQUIRE(store.append(batch));
    }
    auto bytes = read_bytes(file);
    REQUIRE(bytes.size() > (1U << 20U));
    std::fill_n(bytes.begin() + static_cast<std::ptrdiff_t>(bytes.size() / 8192 * 4096), 4096,
                '\0');
    write_bytes(file, bytes);
    {
        const auto opened = open_to_read(file);
        REQUIRE(opened);
        CHECK_FALSE(reads_clean(opened->store));
    }
    CHECK(read_bytes(file) == bytes);
    CHECK_FALSE(open_fresh(file).set_aside); // recording goes on at its end
    OpenOptions thorough;
    thorough.thorough = true;
    const auto read = Store::open(file, Mode::read_only, k_monday, thorough);
    REQUIRE_FALSE(read);
    CHECK(read.error().code == ErrorCode::damaged);
    const auto written = Store::open(file, Mode::read_write, k_monday, thorough);
    REQUIRE(written);
    CHECK(written->set_aside);
}

namespace {

constexpr std::size_t k_batch = 40;

/// Writes batches without end; tells of each through the pipe once it is written.
[[noreturn]] void write_until_killed(const fs::path& file, int told) {
    auto opened = Store::open(file, Mode::read_write, k_monday);
    if (!opened) {
        _exit(1);
    }
    for (int round = 0;; ++round) {
        const auto start = k_monday + 24h * round;
        auto batch = batch_of(EverydayMovements{PointerId{1}, start}.take(k_batch));
        if (!opened->store.append(batch) || write(told, "+", 1) != 1) {
            _exit(1);
        }
    }
}

} // namespace

TEST_CASE("a writer killed at any instant loses at most the batch at hand") {
    const TempFolder folder;
    for (std::size_t kill_after = 1; kill_after <= 10; kill_after += 3) {
        const auto file = folder / ("sagitta-" + std::to_string(kill_after) + ".db");
        {
            auto store = open_fresh(file).store;
            static_cast<void>(upright_mouse(store));
        }
        int pipes[2];
        REQUIRE(pipe(pipes) == 0);
        const pid_t child = fork();
        REQUIRE(child >= 0);
        if (child == 0) {
            close(pipes[0]);
            write_until_killed(file, pipes[1]);
        }
        close(pipes[1]);
        std::size_t told = 0;
        char byte = 0;
        while (told < kill_after && read(pipes[0], &byte, 1) == 1) {
            ++told;
        }
        kill(child, SIGKILL);
        int status = 0;
        REQUIRE(waitpid(child, &status, 0) == child);
        REQUIRE(WIFSIGNALED(status));
        while (read(pipes[0], &byte, 1) == 1) { // told before it was killed
            ++told;
        }
        close(pipes[0]);
        const auto opened = open_fresh(file);
        CHECK_FALSE(opened.set_aside);
        const auto rows = all_movements(opened.store).size();
        CHECK(rows % k_batch == 0);
        CHECK(rows >= told * k_batch);
        CHECK(rows <= (told + 1) * k_batch);
    }
}

TEST_CASE("a log cut at any byte loses batches from its end, never a part of one") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    const auto copy = folder / "copy.db";
    std::string bytes;
    std::string log;
    {
        auto store = open_fresh(file).store;
        const auto mouse = upright_mouse(store);
        for (int round = 0; round < 4; ++round) {
            REQUIRE(store.append(
                batch_of(EverydayMovements{mouse, k_monday + 24h * round}.take(k_batch))));
        }
        bytes = read_bytes(file); // as a kill would leave them
        log = read_bytes(file.native() + "-wal");
    }
    std::size_t most = 0;
    for (std::size_t size = 0; size <= log.size(); size += size < 100 ? 9 : 1931) {
        CAPTURE(size);
        write_bytes(copy, bytes);
        write_bytes(copy.native() + "-wal", log.substr(0, size));
        const auto opened = open_fresh(copy);
        REQUIRE_FALSE(opened.set_aside);
        const auto rows = all_movements(opened.store).size();
        CHECK(rows % k_batch == 0);
        CHECK(rows >= most);
        most = rows;
    }
    CHECK(most >= 3 * k_batch);
}
