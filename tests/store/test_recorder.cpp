#include "store/recorder.hpp"
#include "support.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace sagitta::store;
using namespace sagitta::store::test;
using estimator::Micros;
using estimator::Outcome;
using estimator::PointerIndex;
using estimator::PointerTime;

namespace {

constexpr PointerIndex k_mouse{0};
/// The pointer's clock started two hours before the hour under test.
constexpr estimator::ClockOffset k_clock{
    std::chrono::duration_cast<Micros>((k_monday - 2h).time_since_epoch())};
constexpr PointerTime k_begin{2h};

/// One movement and what the pipeline tells besides, at `time`.
void click_at(Recorder& recorder, PointerTime time) {
    estimator::Scores scores;
    scores.distance = estimator::Pixels::of(200.0);
    scores.path = estimator::Pixels::of(220.0);
    scores.error = estimator::Pixels::of(8.0);
    scores.movement_time = 800ms;
    recorder.on_press(k_mouse, time, estimator::Button::left);
    recorder.on_movement({.pointer = k_mouse,
                          .kind = estimator::MovementKind::click,
                          .button = estimator::Button::left,
                          .start = time - 800ms,
                          .press = time,
                          .scores = scores});
    recorder.on_exposure({.pointer = k_mouse,
                          .time = time,
                          .outcome = Outcome::scored_click,
                          .active = 700ms,
                          .hand_travel = estimator::Millimetres::of(5.0),
                          .reports = 90});
}

struct Desk {
    TempFolder folder;
    Store store = open_fresh(folder / "sagitta.db").store;
    PointerId mouse = upright_mouse(store);

    void prepare(Recorder& recorder) const {
        recorder.set_pointer(k_mouse, mouse);
        recorder.set_clock(k_clock);
    }
};

} // namespace

TEST_CASE("the recorder writes nothing before it is flushed, then all of it once") {
    Desk desk;
    Recorder recorder{&desk.store, {}};
    desk.prepare(recorder);
    CHECK(recorder.empty());
    click_at(recorder, k_begin + 10s);
    recorder.on_wheel(k_mouse, k_begin + 11s, 240);
    recorder.add_event({k_monday, EventKind::started, std::nullopt, "0.1.0"});
    CHECK_FALSE(recorder.empty());
    CHECK(all_movements(desk.store).empty());

    REQUIRE(recorder.flush());
    CHECK(recorder.empty());
    REQUIRE(recorder.flush());
    const auto movements = all_movements(desk.store);
    REQUIRE(movements.size() == 1);
    CHECK(movements.front().press == k_monday + 10s);
    CHECK(movements.front().start == k_monday + 9s + 200ms);
    CHECK(movements.front().pointer == desk.mouse);
    const auto hours = all_hours(desk.store);
    REQUIRE(hours.size() == 1);
    CHECK(hours.front().start == k_monday);
    const auto& summary = hours.front().summary;
    CHECK(summary.clicks == 1);
    CHECK(summary.presses == 1);
    CHECK(summary.wheel_120ths == 240);
    CHECK(summary.outcomes[static_cast<std::size_t>(Outcome::scored_click)] == 1);
    CHECK(summary.motion_reports == 90);
    CHECK(summary.active == 700ms);
    CHECK(desk.store.events({}).value().size() == 1);
    CHECK(recorder.totals().clicks == 1);
    CHECK(recorder.totals().wheel_120ths == 240);
}

TEST_CASE("hours split at the full UTC hour, also before 1970") {
    Desk desk;
    Recorder recorder{&desk.store, {}};
    desk.prepare(recorder);
    click_at(recorder, k_begin - 1us);
    click_at(recorder, k_begin);
    click_at(recorder, k_begin + 1h - 1us);
    recorder.set_clock({Micros{0}});
    click_at(recorder, PointerTime{-1us});
    REQUIRE(recorder.flush());
    const auto hours = all_hours(desk.store);
    REQUIRE(hours.size() == 3);
    CHECK(hours[0].start == UtcTime{-1h});
    CHECK(hours[1].start == k_monday - 1h);
    CHECK(hours[2].summary.clicks == 2);
}

TEST_CASE("a changed condition holds for what follows, within a batch") {
    Desk desk;
    Recorder recorder{&desk.store, {}};
    desk.prepare(recorder);
    click_at(recorder, k_begin + 10s);
    const auto left = desk.store.condition("left hand");
    REQUIRE(left);
    recorder.set_condition(*left);
    click_at(recorder, k_begin + 20s);
    REQUIRE(recorder.flush());
    const auto movements = all_movements(desk.store);
    REQUIRE(movements.size() == 2);
    CHECK(movements[0].condition == k_unlabelled);
    CHECK(movements[1].condition == *left);
    CHECK(all_hours(desk.store).size() == 2);
}

TEST_CASE("with hours only, no single movement is written") {
    Desk desk;
    RecorderOptions options;
    options.keep_movements = false;
    options.batch_movements = 2;
    options.reference_width = estimator::Pixels::of(32.0);
    Recorder recorder{&desk.store, options};
    desk.prepare(recorder);
    click_at(recorder, k_begin + 10s);
    CHECK_FALSE(recorder.full());
    click_at(recorder, k_begin + 20s);
    CHECK(recorder.full());
    REQUIRE(recorder.flush());
    CHECK(all_movements(desk.store).empty());
    REQUIRE(all_hours(desk.store).size() == 1);
    CHECK(all_hours(desk.store).front().summary.clicks == 2);
    CHECK(all_hours(desk.store).front().summary.reference_width == options.reference_width);
}

TEST_CASE("a batch that could not be written is kept and written with what came after") {
    Desk desk;
    const auto file = desk.folder / "sagitta.db";
    const auto away = desk.folder / "away.db";
    RecorderOptions options;
    options.batch_movements = 2;
    Recorder recorder{&desk.store, options};
    desk.prepare(recorder);
    click_at(recorder, k_begin + 10s);
    click_at(recorder, k_begin + 20s);
    std::filesystem::rename(file, away);
    CHECK_FALSE(recorder.flush());
    CHECK_FALSE(recorder.full()); // not at once again
    CHECK_FALSE(recorder.empty());
    click_at(recorder, k_begin + 30s);
    CHECK_FALSE(recorder.flush());
    std::filesystem::rename(away, file);
    click_at(recorder, k_begin + 40s);
    REQUIRE(recorder.flush());
    CHECK(all_movements(desk.store).size() == 4);
    REQUIRE(all_hours(desk.store).size() == 1);
    CHECK(all_hours(desk.store).front().summary.clicks == 4);
}

TEST_CASE("while the store cannot be written memory stays bounded, hours count all, and an event "
          "tells") {
    Desk desk;
    const auto file = desk.folder / "sagitta.db";
    const auto away = desk.folder / "away.db";
    RecorderOptions options;
    options.batch_movements = 4;
    options.max_waiting_movements = 16;
    Recorder recorder{&desk.store, options};
    desk.prepare(recorder);
    std::filesystem::rename(file, away);
    for (int i = 0; i < 100; ++i) {
        click_at(recorder, k_begin + std::chrono::seconds{i});
        if (recorder.full()) {
            CHECK_FALSE(recorder.flush());
        }
    }
    CHECK(recorder.given_up() == 84);
    std::filesystem::rename(away, file);
    REQUIRE(recorder.flush());
    const auto movements = all_movements(desk.store);
    REQUIRE(movements.size() == 16);
    CHECK(movements.back().press == k_monday + 99s);
    CHECK(all_hours(desk.store).front().summary.clicks == 100);
    std::uint64_t told = 0;
    const auto events = desk.store.events({});
    REQUIRE(events);
    for (const auto& event : *events) {
        CHECK(event.kind == EventKind::lost_reports);
        told += std::stoull(event.detail);
    }
    CHECK(told == 84);
}

TEST_CASE("a recording stored twice is refused, and discarding its batch clears the way") {
    Desk desk;
    for (const bool first : {true, false}) {
        Recorder recorder{&desk.store, {}};
        desk.prepare(recorder);
        click_at(recorder, k_begin + 10s);
        const auto flushed = recorder.flush();
        CHECK(flushed.has_value() == first);
        if (!first) {
            CHECK(flushed.error().code == ErrorCode::already_there);
            recorder.discard();
            CHECK(recorder.empty());
            CHECK(recorder.flush());
        }
    }
    CHECK(all_movements(desk.store).size() == 1);
    CHECK(all_hours(desk.store).front().summary.clicks == 1);
}

TEST_CASE("without a store the recorder only counts") {
    Recorder recorder{nullptr, {}};
    click_at(recorder, k_begin);
    recorder.add_event({k_monday, EventKind::started, std::nullopt, ""});
    CHECK(recorder.empty());
    CHECK_FALSE(recorder.full());
    CHECK(recorder.flush());
    CHECK(recorder.totals().clicks == 1);
    CHECK(recorder.totals().presses == 1);
}
