#include "desk.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace std::chrono_literals;
using daemon::PointerChange;
using estimator::Outcome;
using estimator::PointerIndex;
using store::EventKind;
using test::Desk;
using test::FakeClocks;
using test::FakeFeed;
using test::open_store;

TEST_CASE("a click is stored with its time in UTC, and the stop is written") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.click();
    CHECK(desk.movements().empty()); // the batch waits
    CHECK(desk.session.unwritten());
    REQUIRE(desk.session.stop());
    const auto found = desk.movements();
    REQUIRE(found.size() == 1);
    CHECK(found[0].press == estimator::UtcTime{FakeClocks::k_epoch + 101s + 450ms});
    CHECK(desk.events(EventKind::started) == 1);
    CHECK(desk.events(EventKind::plugged) == 1);
    CHECK(desk.events(EventKind::stopped) == 1);
    CHECK_FALSE(desk.session.unwritten());
    CHECK_FALSE(desk.feed.enabled);
}

TEST_CASE("a full batch is written at once") {
    const test::TempDir dir;
    config::Settings settings;
    settings.batch_movements = 3;
    Desk desk{dir.path() / "s.db", settings};
    desk.click();
    desk.click();
    CHECK(desk.movements().empty());
    desk.click();
    CHECK(desk.movements().size() == 3);
}

TEST_CASE("detail: hours writes no single movement") {
    const test::TempDir dir;
    config::Settings settings;
    settings.detail = config::Detail::hours;
    Desk desk{dir.path() / "s.db", settings};
    desk.click();
    REQUIRE(desk.session.stop());
    CHECK(desk.movements().empty());
    std::uint64_t clicks = 0;
    REQUIRE(desk.store.for_each_hour({}, [&](const auto& hour) { clicks += hour.summary.clicks; }));
    CHECK(clicks == 1);
}

TEST_CASE("a store that fails keeps its batch, says so once an hour, and gets it later") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.break_store();
    desk.click();
    desk.session.flush_in_time();
    CHECK(desk.session.status().write_failure);
    desk.click();
    desk.session.flush_in_time();
    const std::string told = desk.log_text.str();
    CHECK(told.find("kept in memory") != std::string::npos);
    CHECK(told.find("kept in memory") == told.rfind("kept in memory"));
    desk.clocks.monotonic += 2h;
    desk.session.turn();
    desk.session.flush_in_time();
    CHECK(desk.log_text.str().rfind("kept in memory") > told.size());

    desk.meddle("DROP TRIGGER broken");
    REQUIRE(desk.session.flush());
    CHECK(desk.movements().size() == 2);
    CHECK_FALSE(desk.session.status().write_failure);
    CHECK(desk.session.status().lost_movements == 0);
}

TEST_CASE("a batch that was stored already is left out and counted, and recording goes on") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.click();
    REQUIRE(desk.session.flush());
    desk.clocks.set -= 2s; // the clock is set back, and the next press falls on the last one's time
    desk.click();
    CHECK_FALSE(desk.session.flush());
    CHECK(desk.session.status().lost_movements == 1);
    desk.click();
    REQUIRE(desk.session.flush());
    CHECK(desk.movements().size() == 2);
}

TEST_CASE("sleep and a set clock break a movement in progress and are marked") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    auto reports = test::click_at(101'000, PointerIndex{0});
    const auto middle = reports.begin() + 100;
    desk.feed.waiting.assign(reports.begin(), middle);
    desk.session.turn();
    desk.clocks.asleep += 3600s;
    desk.clocks.set -= 30s;
    desk.feed.waiting.assign(middle, reports.end());
    desk.session.turn();
    CHECK(desk.outcomes(Outcome::interrupted) == 1);
    desk.clocks.monotonic += 10s;
    desk.click();
    REQUIRE(desk.session.stop());
    CHECK(desk.events(EventKind::slept) == 1);
    CHECK(desk.events(EventKind::clock_step) == 1);
    const auto found = desk.movements();
    REQUIRE_FALSE(found.empty());
    CHECK(found.back().press == estimator::UtcTime{FakeClocks::k_epoch + 111s + 450ms + 3570s});
}

TEST_CASE("a pointer that vanishes in mid-movement interrupts its run") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    const auto reports = test::click_at(101'000, PointerIndex{0});
    desk.feed.waiting.assign(reports.begin(), reports.begin() + 100);
    desk.feed.changes.push_back({PointerChange::Kind::unplugged, PointerIndex{0}, "unplugged"});
    desk.session.turn();
    CHECK(desk.outcomes(Outcome::interrupted) == 1);
    REQUIRE(desk.session.stop());
    CHECK(desk.events(EventKind::unplugged) == 1);
}

TEST_CASE("lost reports are marked with their pointer") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    auto reports = test::click_at(101'000, PointerIndex{0});
    reports[50].after_loss = true;
    desk.feed.waiting = reports;
    desk.session.turn();
    REQUIRE(desk.session.stop());
    const auto events = desk.store.events({});
    REQUIRE(events);
    int marked = 0;
    for (const auto& event : *events) {
        marked += event.kind == EventKind::lost_reports && event.pointer ? 1 : 0;
    }
    CHECK(marked == 1);
}

TEST_CASE("a pause closes the pointers, and holds over a restart until it is lifted") {
    const test::TempDir dir;
    {
        Desk desk{dir.path() / "s.db"};
        CHECK(desk.feed.enabled);
        desk.session.pause();
        CHECK_FALSE(desk.feed.enabled);
        CHECK(desk.session.status().state == "paused");
        CHECK(desk.events(EventKind::paused) == 1); // written at once
    }
    Desk desk{dir.path() / "s.db"};
    CHECK_FALSE(desk.feed.enabled);
    desk.session.set_session_active(false);
    desk.session.resume();
    CHECK_FALSE(desk.feed.enabled); // the session is inactive still
    CHECK(desk.session.status().state == "session_inactive");
    desk.session.set_session_active(true);
    CHECK(desk.feed.enabled);
    CHECK(desk.session.status().state == "recording");
}

TEST_CASE("a label names the condition of what follows, also after a restart") {
    const test::TempDir dir;
    {
        Desk desk{dir.path() / "s.db"};
        desk.click();
        REQUIRE(desk.session.label("thumb trackball"));
        desk.click();
        REQUIRE(desk.session.stop());
        const auto found = desk.movements();
        REQUIRE(found.size() == 2);
        CHECK(found[0].condition == store::k_unlabelled);
        CHECK(found[1].condition != store::k_unlabelled);
    }
    Desk desk{dir.path() / "s.db"};
    CHECK(desk.session.status().condition == "thumb trackball");
    REQUIRE(desk.session.label(""));
    CHECK(desk.session.status().condition.empty());
}

TEST_CASE("new settings hold from now on, and counts live on") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.click();
    config::Settings settings;
    settings.rules.segmentation.min_distance = estimator::Pixels::of(1000.0);
    config::PointerSettings pad;
    pad.name = "pad*";
    pad.ignore = true;
    settings.pointers.push_back(pad);
    REQUIRE(desk.session.apply(settings));
    desk.click();
    CHECK(desk.outcomes(Outcome::scored_click) == 1);
    CHECK(desk.outcomes(Outcome::too_short) == 1);
    CHECK(desk.session.status().presses == 2);
    estimator::PointerDescription pointer;
    pointer.name = "pad 2";
    CHECK_FALSE(desk.feed.filter(pointer));
    pointer.name = "mouse";
    CHECK(desk.feed.filter(pointer));
}

TEST_CASE("a reference width changed within the hour begins a row of its own") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.click();
    config::Settings settings;
    settings.rules.scores.reference_width = estimator::Pixels::of(40.0);
    REQUIRE(desk.session.apply(settings));
    desk.click();
    REQUIRE(desk.session.flush());
    desk.click(); // merged into the second row
    REQUIRE(desk.session.stop());
    std::vector<store::StoredHour> rows;
    REQUIRE(desk.store.for_each_hour({}, [&](const auto& row) { rows.push_back(row); }));
    REQUIRE(rows.size() == 2);
    CHECK(rows[0].start == rows[1].start);
    CHECK(rows[0].pointer == rows[1].pointer);
    const auto& narrow = rows[0].summary;
    const auto& wide = rows[1].summary;
    CHECK(narrow.reference_width.value() == 20.0);
    CHECK(wide.reference_width.value() == 40.0);
    CHECK(narrow.clicks == 1);
    CHECK(wide.clicks == 2);
    // The clicks are alike, so W of the first row is W/2 of the second.
    CHECK(wide.difficulty_bits[0] / 2.0 == doctest::Approx(narrow.difficulty_bits[1]));
    CHECK(wide.difficulty_bits[1] / 2.0 == doctest::Approx(narrow.difficulty_bits[2]));
}

TEST_CASE("new settings bring a gain table's counts to the resolution that it is made for") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.click();
    config::Settings settings;
    config::PointerSettings mouse;
    mouse.name = "mouse";
    mouse.gain = estimator::Gain::table({{estimator::MillimetresPerSecond::of(0.0), 1.0},
                                         {estimator::MillimetresPerSecond::of(1.0), 1.0}})
                     .value();
    mouse.gain_normalised_to = estimator::Cpi::of(500.0); // the mouse counts as one of 1000
    settings.pointers.push_back(mouse);
    REQUIRE(desk.session.apply(settings));
    desk.click();
    REQUIRE(desk.session.stop());
    const auto found = desk.movements();
    REQUIRE(found.size() == 2);
    CHECK(found[1].scores.distance.value() ==
          doctest::Approx(found[0].scores.distance.value() / 2.0).epsilon(0.01));
}

TEST_CASE("new settings are refused while the batch of the old ones cannot be written") {
    const test::TempDir dir;
    Desk desk{dir.path() / "s.db"};
    desk.break_store();
    desk.click();
    config::Settings settings;
    settings.rules.segmentation.min_distance = estimator::Pixels::of(1000.0);
    CHECK_FALSE(desk.session.apply(settings));
    desk.click();
    CHECK(desk.outcomes(Outcome::scored_click) == 2);
}

TEST_CASE("movements beyond their time are deleted once a day") {
    const test::TempDir dir;
    config::Settings settings;
    settings.keep_movements = std::chrono::days{2};
    Desk desk{dir.path() / "s.db", settings};
    desk.click();
    REQUIRE(desk.session.flush());
    CHECK(desk.movements().size() == 1);
    desk.clocks.monotonic += 72h;
    desk.click();
    REQUIRE(desk.session.flush());
    CHECK(desk.movements().size() == 1);
}

TEST_CASE("without a pointer the log says what to do, once") {
    const test::TempDir dir;
    FakeFeed feed;
    FakeClocks clocks;
    auto store = open_store(dir.path() / "s.db");
    std::ostringstream text;
    spdlog::logger log{"test", std::make_shared<spdlog::sinks::ostream_sink_st>(text)};
    daemon::RecordingSession session{config::Settings{}, {feed, clocks, store, log}, "0.0"};
    session.start(std::nullopt);
    session.turn();
    const std::string told = text.str();
    CHECK(told.find("sagitta check") != std::string::npos);
    CHECK(told.find("sagitta check") == told.rfind("sagitta check"));
    CHECK(session.status().state == "no_pointer");
}
