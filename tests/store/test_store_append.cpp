#include "support.hpp"

#include <csignal>
#include <doctest/doctest.h>
#include <sqlite3.h>
#include <sys/resource.h>

using namespace sagitta;
using namespace sagitta::store;
using namespace sagitta::store::test;
namespace fs = std::filesystem;

namespace {

struct Rows {
    std::size_t movements, hours, events;
    friend bool operator==(const Rows&, const Rows&) = default;
};

Rows rows_in(const Store& store) {
    return {all_movements(store).size(), all_hours(store).size(), store.events({}).value().size()};
}

Batch whole_batch(PointerId pointer, UtcTime start, std::size_t movements) {
    auto batch = batch_of(EverydayMovements{pointer, start}.take(movements));
    batch.events.push_back({start, EventKind::started, std::nullopt, "0.1.0"});
    return batch;
}

/// A size limit on files, as a full disk is felt by the program.
class FileSizeLimit {
public:
    explicit FileSizeLimit(rlim_t bytes) {
        REQUIRE(getrlimit(RLIMIT_FSIZE, &m_before) == 0);
        m_handler = std::signal(SIGXFSZ, SIG_IGN);
        const rlimit limit{bytes, m_before.rlim_max};
        REQUIRE(setrlimit(RLIMIT_FSIZE, &limit) == 0);
    }
    FileSizeLimit(const FileSizeLimit&) = delete;
    FileSizeLimit& operator=(const FileSizeLimit&) = delete;
    ~FileSizeLimit() {
        setrlimit(RLIMIT_FSIZE, &m_before);
        std::signal(SIGXFSZ, m_handler);
    }

private:
    rlimit m_before{};
    void (*m_handler)(int) = SIG_DFL;
};

/// Another program at work on the file.
class OtherProgram {
public:
    OtherProgram(const fs::path& file, const char* sql) {
        REQUIRE(sqlite3_open(file.c_str(), &m_database) == SQLITE_OK);
        REQUIRE(sqlite3_exec(m_database, sql, nullptr, nullptr, nullptr) == SQLITE_OK);
    }
    OtherProgram(const OtherProgram&) = delete;
    OtherProgram& operator=(const OtherProgram&) = delete;
    ~OtherProgram() { sqlite3_close(m_database); }

private:
    sqlite3* m_database = nullptr;
};

Store open_impatient(const fs::path& file) {
    OpenOptions options;
    options.busy_timeout = 1ms;
    auto opened = Store::open(file, Mode::read_write, k_monday, options);
    REQUIRE(opened);
    return std::move(opened->store);
}

} // namespace

TEST_CASE("a movement stored before is refused with its whole batch") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto mouse = upright_mouse(store);
    const auto first = whole_batch(mouse, k_monday, 50);
    REQUIRE(store.append(first));
    const auto before = rows_in(store);
    const auto presses = all_hours(store).front().summary.presses;

    auto second = whole_batch(mouse, k_monday + 24h, 50);
    second.movements.push_back(first.movements[7]); // the last of the batch
    const auto again = store.append(second);
    REQUIRE_FALSE(again);
    CHECK(again.error().code == ErrorCode::already_there);
    CHECK(rows_in(store) == before);
    CHECK(all_hours(store).front().summary.presses == presses);

    second.movements.pop_back();
    REQUIRE(store.append(second)); // the same batch without it is taken
    CHECK(rows_in(store).movements == 100);
}

TEST_CASE("the same press time of another pointer is another movement") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    auto batch = batch_of(EverydayMovements{upright_mouse(store), k_monday}.take(5));
    REQUIRE(store.append(batch));
    for (auto& movement : batch.movements) {
        movement.pointer = thumb_trackball(store);
    }
    CHECK(store.append(batch));
    CHECK(all_movements(store).size() == 10);
}

TEST_CASE("a batch of an unknown pointer is refused whole") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto appended = store.append(whole_batch(PointerId{99}, k_monday, 5));
    REQUIRE_FALSE(appended);
    CHECK(appended.error().code == ErrorCode::io);
    CHECK(rows_in(store) == Rows{0, 0, 0});
}

TEST_CASE("a batch that fails at its last part leaves none of the earlier ones") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    auto store = open_fresh(file).store;
    const auto batch = whole_batch(upright_mouse(store), k_monday, 50);
    run_sql(file, "CREATE TRIGGER fail_late BEFORE INSERT ON event BEGIN "
                  "SELECT RAISE(ABORT, 'injected'); END");
    const auto appended = store.append(batch);
    REQUIRE_FALSE(appended);
    CHECK(appended.error().code == ErrorCode::io);
    CHECK(rows_in(store) == Rows{0, 0, 0});
    run_sql(file, "DROP TRIGGER fail_late");
    REQUIRE(store.append(batch));
    CHECK(rows_in(store).movements == 50);
}

TEST_CASE("when space runs out at any point a batch is not written, and is taken when there is "
          "space again") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    {
        auto store = open_fresh(file).store;
        REQUIRE(store.append(whole_batch(upright_mouse(store), k_monday, 100)));
    }
    auto store = open_fresh(file).store;
    const auto batch = whole_batch(PointerId{1}, k_monday + 24h, 400);
    std::size_t refused = 0;
    for (rlim_t limit = 0; limit < 80'000; limit += 4'096 + 111) {
        const FileSizeLimit full{limit};
        const auto appended = store.append(batch);
        if (appended) {
            break;
        }
        ++refused;
        CAPTURE(appended.error().message);
        CHECK(appended.error().code == ErrorCode::no_space);
        REQUIRE(rows_in(store).movements == 100);
    }
    CHECK(refused > 5);
    if (all_movements(store).size() == 100) {
        REQUIRE(store.append(batch));
    }
    CHECK(rows_in(store).movements == 500);
    CHECK(ask_sql(file, "PRAGMA integrity_check") == "ok");
}

TEST_CASE("a disk that is full from the start is said to be full") {
    const TempFolder folder;
    const FileSizeLimit full{1000};
    const auto opened = Store::open(folder / "sagitta.db", Mode::read_write, k_monday);
    REQUIRE_FALSE(opened);
    CHECK(opened.error().code == ErrorCode::no_space);
}

TEST_CASE("a file locked by another program is busy, and written when the lock goes") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    auto store = open_impatient(file);
    const auto batch = whole_batch(upright_mouse(store), k_monday, 50);
    {
        const OtherProgram other{file, "BEGIN IMMEDIATE"};
        const auto appended = store.append(batch);
        REQUIRE_FALSE(appended);
        CHECK(appended.error().code == ErrorCode::busy);
        CHECK(rows_in(store) == Rows{0, 0, 0}); // reading goes on
    }
    REQUIRE(store.append(batch));
    CHECK(rows_in(store).movements == 50);
}

TEST_CASE("opening a file that another program keeps to itself is busy, not damaged") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    { auto store = open_fresh(file).store; }
    const OtherProgram other{file, "PRAGMA locking_mode = EXCLUSIVE; BEGIN EXCLUSIVE; "
                                   "INSERT INTO condition (label) VALUES ('x')"};
    OpenOptions options;
    options.busy_timeout = 1ms;
    for (const auto mode : {Mode::read_write, Mode::read_only}) {
        const auto opened = Store::open(file, mode, k_monday, options);
        REQUIRE_FALSE(opened);
        CHECK(opened.error().code == ErrorCode::busy);
    }
}

TEST_CASE("writing to a file that was moved away or replaced is refused, not lost") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    auto store = open_fresh(file).store;
    const auto mouse = upright_mouse(store);
    fs::rename(file, folder / "elsewhere.db");
    const auto gone = store.append(whole_batch(mouse, k_monday, 5));
    REQUIRE_FALSE(gone);
    CHECK(gone.error().code == ErrorCode::not_found);
    write_bytes(file, "");
    CHECK_FALSE(store.append(whole_batch(mouse, k_monday, 5)));
    fs::rename(folder / "elsewhere.db", file);
    CHECK(store.append(whole_batch(mouse, k_monday, 5)));
}

TEST_CASE("a reader sees whole batches only while another connection writes") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    auto writer = open_fresh(file).store;
    const auto mouse = upright_mouse(writer);
    const auto reader = open_to_read(file);
    REQUIRE(reader);
    std::size_t written = 0;
    for (int round = 0; round < 10; ++round) {
        std::size_t seen = 0;
        REQUIRE(reader->store.for_each_movement({}, [&](const StoredMovement&) {
            if (++seen == 5) { // in the middle of reading
                REQUIRE(writer.append(whole_batch(mouse, k_monday + 24h * (round + 1), 20)));
            }
        }));
        CHECK(seen == written);
        if (seen < 5) {
            REQUIRE(writer.append(whole_batch(mouse, k_monday + 24h * (round + 1), 20)));
        }
        written += 20;
    }
    CHECK(all_movements(reader->store).size() == 200);
}
