#include "store/movement_row.hpp"
#include "support.hpp"

#include <cmath>
#include <doctest/doctest.h>
#include <limits>

using namespace sagitta;
using namespace sagitta::store;
using namespace sagitta::store::test;
using estimator::Degrees;
using estimator::Micros;
using estimator::Millimetres;
using estimator::MillimetresPerSecond;
using estimator::Pixels;

namespace {

/// Every score different, each on a step of its scale.
estimator::Scores distinct_scores() {
    estimator::Scores scores;
    scores.distance = Pixels::of(1234.56);
    scores.direction = Degrees::of(359.9);
    scores.movement_time = Micros{987'654};
    scores.dwell = Micros{123'400};
    scores.path = Pixels::of(1301.07);
    scores.error = Pixels::of(8.71);
    scores.offset = Pixels::of(-3.29);
    scores.variability = Pixels::of(7.77);
    scores.max_deviation = Pixels::of(21.03);
    scores.axis_crossings = 65535;
    scores.direction_changes = 4;
    scores.orthogonal_changes = 2;
    scores.peak_speed = MillimetresPerSecond::of(412.3);
    scores.time_to_peak = Micros{312'300};
    scores.submovements = 3;
    scores.primary_fraction = 0.9137;
    scores.primary_lateral = Pixels::of(-5.55);
    scores.initial_angle = Degrees::of(-179.9);
    scores.smoothness_sparc = -1.413;
    scores.smoothness_ldlj = -6.019;
    scores.hand_travel = Millimetres::of(27.54);
    scores.reports = 4'294'967'295U;
    scores.flags = 255;
    return scores;
}

void check_equal(const estimator::Scores& a, const estimator::Scores& b) {
    CHECK(a.distance == b.distance);
    CHECK(a.direction == b.direction);
    CHECK(a.movement_time == b.movement_time);
    CHECK(a.dwell == b.dwell);
    CHECK(a.path == b.path);
    CHECK(a.error == b.error);
    CHECK(a.offset == b.offset);
    CHECK(a.variability == b.variability);
    CHECK(a.max_deviation == b.max_deviation);
    CHECK(a.axis_crossings == b.axis_crossings);
    CHECK(a.direction_changes == b.direction_changes);
    CHECK(a.orthogonal_changes == b.orthogonal_changes);
    CHECK(a.peak_speed == b.peak_speed);
    CHECK(a.time_to_peak == b.time_to_peak);
    CHECK(a.submovements == b.submovements);
    CHECK(a.primary_fraction == b.primary_fraction);
    CHECK(a.primary_lateral == b.primary_lateral);
    CHECK(a.initial_angle == b.initial_angle);
    CHECK(a.smoothness_sparc == b.smoothness_sparc);
    CHECK(a.smoothness_ldlj == b.smoothness_ldlj);
    CHECK(a.hand_travel == b.hand_travel);
    CHECK(a.reports == b.reports);
    CHECK(a.flags == b.flags);
}

StoredMovement movement_with(PointerId pointer, const estimator::Scores& scores) {
    return {.start = k_monday - scores.movement_time,
            .press = k_monday,
            .pointer = pointer,
            .condition = k_unlabelled,
            .kind = estimator::MovementKind::drag,
            .button = estimator::Button::task,
            .scores = scores};
}

/// What comes back after writing and reading.
StoredMovement written_and_read(const estimator::Scores& scores) {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    Batch batch;
    batch.movements.push_back(movement_with(upright_mouse(store), scores));
    REQUIRE(store.append(batch));
    const auto rows = all_movements(store);
    REQUIRE(rows.size() == 1);
    return rows.front();
}

} // namespace

TEST_CASE("every column of a movement reads back as it was written") {
    const auto scores = distinct_scores();
    const auto row = written_and_read(scores);
    check_equal(row.scores, scores);
    CHECK(row.press == k_monday);
    CHECK(row.start == k_monday - scores.movement_time);
    CHECK(row.condition == k_unlabelled);
    CHECK(row.kind == estimator::MovementKind::drag);
    CHECK(row.button == estimator::Button::task);
}

TEST_CASE("a number between two steps is stored as the nearer one, and then stays") {
    auto scores = distinct_scores();
    scores.distance = Pixels::of(100.016);
    scores.offset = Pixels::of(-0.016);
    scores.primary_fraction = 0.123451;
    scores.dwell = Micros{120'051};
    const auto once = written_and_read(scores);
    CHECK(once.scores.distance == Pixels::of(100.02));
    CHECK(once.scores.offset == Pixels::of(-0.02));
    CHECK(once.scores.primary_fraction == 0.1235);
    CHECK(once.scores.dwell == Micros{120'100});
    check_equal(written_and_read(once.scores).scores, once.scores);
}

TEST_CASE("an angle that rounds to a full turn stays in its range") {
    auto scores = distinct_scores();
    scores.direction = Degrees::of(359.97);
    scores.initial_angle = Degrees::of(-179.98);
    const auto row = written_and_read(scores);
    CHECK(row.scores.direction == Degrees::zero());
    CHECK(row.scores.initial_angle == Degrees::of(180.0));
}

TEST_CASE("a number that is not finite or beyond 64 bits reads back as not a number") {
    auto scores = distinct_scores();
    scores.distance = Pixels::of(std::numeric_limits<double>::infinity());
    scores.path = Pixels::of(std::numeric_limits<double>::quiet_NaN());
    scores.smoothness_ldlj = -1e300;
    const auto row = written_and_read(scores);
    CHECK(std::isnan(row.scores.distance.value()));
    CHECK(std::isnan(row.scores.path.value()));
    CHECK(std::isnan(row.scores.smoothness_ldlj));
    CHECK(row.scores.error == scores.error);
}

TEST_CASE("a movement row with an impossible value is damage, not a movement") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    {
        auto store = open_fresh(file).store;
        REQUIRE(store.append(batch_of(EverydayMovements{upright_mouse(store), k_monday}.take(3))));
    }
    run_sql(file, "UPDATE movement SET kind = 7");
    const auto opened = open_to_read(file);
    REQUIRE(opened);
    const auto read = opened->store.for_each_movement({}, [](const StoredMovement&) {});
    REQUIRE_FALSE(read);
    CHECK(read.error().code == ErrorCode::damaged);
}

TEST_CASE("movements come in the order of time, chosen by time and pointer") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto mouse = upright_mouse(store);
    const auto ball = thumb_trackball(store);
    REQUIRE(mouse != ball);
    REQUIRE(store.append(batch_of(EverydayMovements{ball, k_monday + 1h}.take(200))));
    REQUIRE(store.append(batch_of(EverydayMovements{mouse, k_monday}.take(300))));

    const auto rows = all_movements(store);
    REQUIRE(rows.size() == 500);
    for (std::size_t i = 1; i < rows.size(); ++i) {
        REQUIRE(rows[i - 1].press <= rows[i].press);
    }
    const auto from = rows[100].press;
    const auto to = rows[400].press;
    std::size_t expected = 0;
    for (const auto& row : rows) {
        expected += from <= row.press && row.press < to && row.pointer == ball ? 1U : 0U;
    }
    std::size_t found = 0;
    REQUIRE(store.for_each_movement({from, to, ball}, [&](const StoredMovement& row) {
        CHECK(row.pointer == ball);
        CHECK(from <= row.press);
        CHECK(row.press < to);
        ++found;
    }));
    CHECK(found == expected);
    CHECK(found > 100);
}

TEST_CASE("a pointer's row is found again, and its changed CPI and kind are updated in place") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto mouse = upright_mouse(store);
    CHECK(upright_mouse(store) == mouse);

    estimator::PointerDescription description;
    description.name = "upright mouse";
    description.kind = estimator::PointerKind::trackball;
    description.bus = 3;
    description.vendor = 0x1234;
    description.product = 1;
    description.udev_cpi = estimator::Cpi::of(1600.0);
    const auto calibration = estimator::calibrate(
        description, std::nullopt, estimator::CpiSource::config, estimator::Gain::unity());
    const auto again = store.pointer(description, calibration, k_monday + 24h);
    REQUIRE(again);
    CHECK(*again == mouse);
    description.origin = estimator::Origin::simulated;
    const auto simulated = store.pointer(description, calibration, k_monday + 24h);
    REQUIRE(simulated);
    CHECK(*simulated != mouse);

    const auto pointers = store.pointers();
    REQUIRE(pointers);
    REQUIRE(pointers->size() == 2);
    const auto& row = pointers->front();
    CHECK(row.id == mouse);
    CHECK(row.name == "upright mouse");
    CHECK(row.kind == estimator::PointerKind::trackball);
    CHECK(row.origin == estimator::Origin::live);
    CHECK(row.bus == 3);
    CHECK(row.vendor == 0x1234);
    CHECK(row.product == 1);
    CHECK(row.cpi == estimator::Cpi::of(1600.0));
    CHECK(row.cpi_source == estimator::CpiSource::udev);
    CHECK(row.first_seen == k_monday);
}

TEST_CASE("a condition is made once per label, and the first is the unlabelled one") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto left = store.condition("left hand");
    REQUIRE(left);
    CHECK(store.condition("left hand").value() == *left);
    CHECK(store.condition("").value() == k_unlabelled);
    const auto conditions = store.conditions();
    REQUIRE(conditions);
    REQUIRE(conditions->size() == 2);
    CHECK(conditions->front().label.empty());
    CHECK(conditions->back().label == "left hand");
}

TEST_CASE("events come in the order of time, each kind with its name") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto mouse = upright_mouse(store);
    Batch batch;
    for (int kind = 11; kind >= 0; --kind) {
        batch.events.push_back({k_monday + std::chrono::minutes{kind}, static_cast<EventKind>(kind),
                                kind % 2 == 0 ? std::optional{mouse} : std::nullopt,
                                "detail " + std::to_string(kind)});
    }
    REQUIRE(store.append(batch));
    const auto events = store.events({});
    REQUIRE(events);
    REQUIRE(events->size() == 12);
    for (std::size_t i = 0; i < 12; ++i) {
        CHECK(static_cast<std::size_t>((*events)[i].kind) == i);
        CHECK((*events)[i].detail == "detail " + std::to_string(i));
        CHECK((*events)[i].pointer.has_value() == (i % 2 == 0));
        CHECK(to_text((*events)[i].kind) != "unknown");
    }
    const auto some = store.events({k_monday + 3min, k_monday + 8min, std::nullopt});
    REQUIRE(some);
    CHECK(some->size() == 5);
    const auto of_mouse = store.events({std::nullopt, std::nullopt, mouse});
    REQUIRE(of_mouse);
    CHECK(of_mouse->size() == 6);
}

TEST_CASE("retention deletes single movements before a time and keeps their hours") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto movements = EverydayMovements{upright_mouse(store), k_monday}.take(500);
    REQUIRE(store.append(batch_of(movements)));
    const auto hours = all_hours(store).size();
    const auto keep_from = movements[200].press;
    const auto deleted = store.prune_movements(keep_from);
    REQUIRE(deleted);
    CHECK(*deleted == 200);
    const auto left = all_movements(store);
    REQUIRE(left.size() == 300);
    CHECK(left.front().press == keep_from);
    CHECK(all_hours(store).size() == hours);
    CHECK(store.prune_movements(keep_from).value() == 0);
}
