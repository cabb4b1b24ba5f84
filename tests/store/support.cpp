#include "support.hpp"

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <doctest/doctest.h>
#include <fstream>
#include <iterator>
#include <map>
#include <sqlite3.h>
#include <tuple>
#include <unistd.h>

namespace sagitta::store::test {

namespace fs = std::filesystem;
using estimator::Degrees;
using estimator::Micros;
using estimator::Millimetres;
using estimator::MillimetresPerSecond;
using estimator::Pixels;

namespace {

/// Memory when there is such a place: syncing to a disk tests nothing here and takes long.
fs::path temp_place() {
    const char* const memory = "/dev/shm";
    return access(memory, W_OK) == 0 ? fs::path{memory} : fs::temp_directory_path();
}

} // namespace

TempFolder::TempFolder() {
    std::string pattern = (temp_place() / "sagitta-store-XXXXXX").native();
    REQUIRE(mkdtemp(pattern.data()) != nullptr);
    m_path = fs::canonical(pattern);
}

TempFolder::~TempFolder() {
    std::error_code ignored;
    fs::remove_all(m_path, ignored);
}

Opened open_fresh(const fs::path& file) {
    auto opened = Store::open(file, Mode::read_write, k_monday);
    if (!opened) {
        FAIL(opened.error().message);
    }
    return std::move(*opened);
}

Result<Opened> open_to_read(const fs::path& file) {
    return Store::open(file, Mode::read_only, k_monday);
}

namespace {

PointerId make_pointer(Store& store, const std::string& name, estimator::PointerKind kind) {
    estimator::PointerDescription description;
    description.name = name;
    description.kind = kind;
    description.bus = 3;
    description.vendor = 0x1234;
    description.product = kind == estimator::PointerKind::mouse ? 1 : 2;
    const auto calibration =
        estimator::calibrate(description, estimator::Cpi::of(1200.0), estimator::CpiSource::config,
                             estimator::Gain::unity());
    const auto id = store.pointer(description, calibration, k_monday);
    REQUIRE(id);
    return *id;
}

} // namespace

PointerId upright_mouse(Store& store) {
    return make_pointer(store, "upright mouse", estimator::PointerKind::mouse);
}

PointerId thumb_trackball(Store& store) {
    return make_pointer(store, "thumb trackball", estimator::PointerKind::trackball);
}

double EverydayMovements::log_normal(double median, double sd_ln) {
    return median * std::exp(std::normal_distribution<double>{0.0, sd_ln}(m_random));
}

StoredMovement EverydayMovements::next() {
    const auto pick = [this](int high) {
        return static_cast<std::uint16_t>(std::uniform_int_distribution<int>{0, high}(m_random));
    };
    const auto between = [this](double low, double high) {
        return std::uniform_real_distribution<double>{low, high}(m_random);
    };
    estimator::Scores scores;
    const double distance = std::clamp(log_normal(194.0, 0.9), 20.0, 2500.0);
    const double time_s = std::clamp(log_normal(0.91, 0.45), 0.15, 4.0);
    const double error = distance * log_normal(0.045, 0.8);
    scores.distance = Pixels::of(distance);
    scores.direction = Degrees::of(between(0.0, 359.9));
    scores.movement_time = Micros{static_cast<std::int64_t>(time_s * 1e6)};
    scores.dwell = Micros{static_cast<std::int64_t>(between(0.02, 0.4) * 1e6)};
    scores.path = Pixels::of(distance * (1.0 + log_normal(0.14, 0.9)));
    scores.error = Pixels::of(error);
    scores.offset = Pixels::of(between(-error, error));
    scores.variability = Pixels::of(error * between(0.5, 1.2));
    scores.max_deviation = Pixels::of(error * between(1.5, 4.0));
    scores.axis_crossings = pick(4);
    scores.direction_changes = pick(8);
    scores.orthogonal_changes = pick(3);
    scores.peak_speed = MillimetresPerSecond::of(distance * log_normal(0.5, 0.4));
    scores.time_to_peak = scores.movement_time * 4 / 10;
    scores.submovements = static_cast<std::uint16_t>(1 + pick(5));
    scores.primary_fraction = between(0.5, 1.1);
    scores.primary_lateral = Pixels::of(between(-error, error));
    scores.initial_angle = Degrees::of(between(-20.0, 20.0));
    scores.smoothness_sparc = -log_normal(2.1, 0.2);
    scores.smoothness_ldlj = -log_normal(7.0, 0.2);
    scores.hand_travel = Millimetres::of(scores.path.value() * 25.4 / 1200.0);
    scores.reports = static_cast<std::uint32_t>(time_s * 600.0);
    m_time += Micros{static_cast<std::int64_t>(log_normal(12.0, 0.8) * 1e6)};
    return {.start = m_time - scores.movement_time,
            .press = m_time,
            .pointer = m_pointer,
            .condition = k_unlabelled,
            .kind = pick(9) == 0 ? estimator::MovementKind::drag : estimator::MovementKind::click,
            .button = pick(9) == 0 ? estimator::Button::right : estimator::Button::left,
            .scores = scores};
}

std::vector<StoredMovement> EverydayMovements::take(std::size_t count) {
    std::vector<StoredMovement> movements;
    std::generate_n(std::back_inserter(movements), count, [this] { return next(); });
    return movements;
}

std::vector<StoredHour> hours_of(const std::vector<StoredMovement>& movements) {
    std::map<std::tuple<UtcTime, PointerId, ConditionId>, estimator::HourSummary> hours;
    for (const auto& movement : movements) {
        const auto start = std::chrono::floor<std::chrono::hours>(movement.press);
        auto& hour = hours[{start, movement.pointer, movement.condition}];
        const bool click = movement.kind == estimator::MovementKind::click;
        hour.add(estimator::Movement{.pointer = {},
                                     .kind = movement.kind,
                                     .button = movement.button,
                                     .start = {},
                                     .press = {},
                                     .scores = movement.scores});
        hour.add(estimator::Exposure{.pointer = {},
                                     .time = {},
                                     .outcome = click ? estimator::Outcome::scored_click
                                                      : estimator::Outcome::scored_drag,
                                     .active = movement.scores.movement_time,
                                     .hand_travel = movement.scores.hand_travel,
                                     .reports = movement.scores.reports});
        ++hour.presses;
        hour.wheel_120ths += 120;
    }
    std::vector<StoredHour> rows;
    for (const auto& [key, summary] : hours) {
        rows.push_back({std::get<0>(key), std::get<1>(key), std::get<2>(key), summary});
    }
    return rows;
}

Batch batch_of(std::vector<StoredMovement> movements) {
    Batch batch;
    batch.hours = hours_of(movements);
    batch.movements = std::move(movements);
    return batch;
}

std::vector<StoredMovement> all_movements(const Store& store) {
    std::vector<StoredMovement> rows;
    const auto read =
        store.for_each_movement({}, [&](const StoredMovement& row) { rows.push_back(row); });
    if (!read) {
        FAIL(read.error().message);
    }
    return rows;
}

std::vector<StoredHour> all_hours(const Store& store) {
    std::vector<StoredHour> rows;
    const auto read = store.for_each_hour({}, [&](const StoredHour& row) { rows.push_back(row); });
    if (!read) {
        FAIL(read.error().message);
    }
    return rows;
}

std::string read_bytes(const fs::path& file) {
    std::ifstream stream{file, std::ios::binary};
    REQUIRE(stream);
    return {std::istreambuf_iterator<char>{stream}, {}};
}

void write_bytes(const fs::path& file, const std::string& bytes) {
    std::ofstream stream{file, std::ios::binary | std::ios::trunc};
    stream.write(bytes.data(), static_cast<std::streamsize>(bytes.size()));
    stream.close();
    REQUIRE(stream);
}

std::vector<std::string> names_in(const fs::path& folder) {
    std::vector<std::string> names;
    for (const auto& entry : fs::directory_iterator{folder}) {
        names.push_back(entry.path().filename().native());
    }
    std::sort(names.begin(), names.end());
    return names;
}

std::string ask_sql(const fs::path& file, const std::string& sql) {
    sqlite3* database = nullptr;
    REQUIRE(sqlite3_open(file.c_str(), &database) == SQLITE_OK);
    std::string answer;
    const auto take = [](void* to, int, char** values, char**) {
        auto& text = *static_cast<std::string*>(to);
        if (text.empty() && values[0] != nullptr) {
            text = values[0];
        }
        return 0;
    };
    const int code = sqlite3_exec(database, sql.c_str(), take, &answer, nullptr);
    const std::string message = sqlite3_errmsg(database);
    sqlite3_close(database);
    if (code != SQLITE_OK) {
        FAIL(message);
    }
    return answer;
}

void run_sql(const fs::path& file, const std::string& sql) {
    static_cast<void>(ask_sql(file, sql));
}

} // namespace sagitta::store::test
