#include "desk.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace std::chrono_literals;
using daemon::PointerChange;
using estimator::PointerIndex;
using store::EventKind;
using test::Desk;

namespace {

std::vector<std::filesystem::path> damaged_files(const std::filesystem::path& folder) {
    std::vector<std::filesystem::path> found;
    for (const auto& entry : std::filesystem::directory_iterator{folder}) {
        const std::string name = entry.path().filename().string();
        if (name.find(".damaged-") != std::string::npos && !name.ends_with("-wal") &&
            !name.ends_with("-shm")) {
            found.push_back(entry.path());
        }
    }
    return found;
}

std::string detail_of(const Desk& desk, EventKind kind) {
    const auto events = desk.store.events({});
    REQUIRE(events);
    for (const auto& event : *events) {
        if (event.kind == kind) {
            return event.detail;
        }
    }
    return "none";
}

} // namespace

TEST_CASE("a store that breaks while recording is set aside, and the batch goes to a fresh one") {
    const test::TempDir dir;
    {
        // Others came first, so that a fresh store numbers everything differently.
        auto store = test::open_store(dir.path() / "s.db");
        estimator::PointerDescription other;
        other.name = "trackball";
        REQUIRE(
            store.pointer(other,
                          estimator::calibrate(other, std::nullopt, estimator::CpiSource::config,
                                               estimator::Gain::unity()),
                          {}));
        REQUIRE(store.condition("first"));
    }
    Desk desk{dir.path() / "s.db"};
    REQUIRE(desk.session.label("upright mouse"));
    desk.click();
    desk.meddle("DROP TABLE hour");
    REQUIRE(desk.session.flush());

    CHECK(damaged_files(dir.path()).size() == 1);
    CHECK(detail_of(desk, EventKind::settings) == "condition: upright mouse"); // for a restart
    CHECK(desk.events(EventKind::set_aside) == 1);
    CHECK(desk.log_text.str().find("set aside as") != std::string::npos);
    CHECK_FALSE(desk.session.status().write_failure);
    CHECK(desk.session.status().lost_movements == 0);
    desk.click();
    REQUIRE(desk.session.flush());
    const auto found = desk.movements();
    REQUIRE(found.size() == 2); // the one that waited, and the one after
    const auto pointers = desk.store.pointers();
    const auto conditions = desk.store.conditions();
    REQUIRE(pointers);
    REQUIRE(conditions);
    for (const auto& movement : found) {
        for (const auto& pointer : *pointers) {
            CHECK((pointer.id == movement.pointer) == (pointer.name == "mouse"));
        }
        for (const auto& condition : *conditions) {
            CHECK((condition.id == movement.condition) == (condition.label == "upright mouse"));
        }
    }
}

TEST_CASE("a broken store that cannot be replaced yet keeps its batch until it can") {
    const test::TempDir dir;
    Desk desk{dir.path() / "folder" / "s.db"};
    desk.click();
    desk.meddle("DROP TABLE hour");
    // A folder in its place is left as it is.
    const auto away = dir.path() / "away.db";
    const auto break_in = [&] {
        std::filesystem::rename(desk.store_file, away);
        std::filesystem::create_directory(desk.store_file);
    };
    break_in();
    CHECK_FALSE(desk.session.flush()); // moved away while in use
    std::filesystem::remove(desk.store_file);
    std::filesystem::rename(away, desk.store_file);
    REQUIRE(desk.session.flush());
    CHECK(desk.movements().size() == 1);
    CHECK(desk.session.status().lost_movements == 0);
}

TEST_CASE("a pointer that the store cannot name yet is recorded as soon as it can") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    REQUIRE(desk.session.flush());
    desk.meddle("CREATE TRIGGER broken BEFORE INSERT ON pointer BEGIN "
                "SELECT RAISE(ABORT, 'broken by the test'); END");
    desk.feed.plug("trackball");
    desk.session.turn();
    CHECK(desk.log_text.str().find("cannot record trackball yet") != std::string::npos);
    const auto click_trackball = [&] {
        const auto start =
            std::chrono::duration_cast<std::chrono::milliseconds>(desk.clocks.monotonic).count();
        desk.feed.waiting = test::click_at(start + 1000, PointerIndex{1});
        desk.clocks.monotonic += 2s;
        desk.session.turn();
    };
    click_trackball(); // nobody knows it yet
    desk.click();      // the other pointer goes on
    REQUIRE(desk.session.flush());
    CHECK(desk.movements().size() == 1);

    desk.meddle("DROP TRIGGER broken");
    REQUIRE(desk.session.flush());
    click_trackball();
    REQUIRE(desk.session.flush());
    const auto found = desk.movements();
    REQUIRE(found.size() == 2);
    CHECK(found[0].pointer != found[1].pointer);
}

TEST_CASE("events beyond the first thousand that wait are counted in one of their own") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    REQUIRE(desk.session.flush());
    desk.break_store();
    desk.click();
    constexpr std::size_t k_beyond = 7;
    for (std::size_t i = 0; i < daemon::k_most_waiting_events + k_beyond; ++i) {
        desk.feed.changes.push_back({PointerChange::Kind::unplugged, PointerIndex{0}, "gone"});
    }
    desk.session.turn();
    CHECK_FALSE(desk.session.flush());
    desk.meddle("DROP TRIGGER broken");
    REQUIRE(desk.session.flush());
    REQUIRE(desk.session.flush());
    CHECK(desk.events(EventKind::unplugged) == static_cast<int>(daemon::k_most_waiting_events));
    CHECK(detail_of(desk, EventKind::lost_reports) ==
          "7 events were left out while the store could not be written");
    CHECK(desk.movements().size() == 1);
}

TEST_CASE("a batch that was stored already leaves an event that says so") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.click();
    REQUIRE(desk.session.flush());
    desk.clocks.set -= 2s; // the next press falls on the last one's time
    desk.click();
    CHECK_FALSE(desk.session.flush());
    REQUIRE(desk.session.flush());
    CHECK(detail_of(desk, EventKind::lost_reports) ==
          "a batch held movements that were stored already");
    CHECK(desk.log_text.str().find("left out") != std::string::npos);
}
