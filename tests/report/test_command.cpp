// The built command as others script it: exit codes, streams, and rows that read back.
#include "report/export.hpp"
#include "tests/report/hours.hpp"

#include <cstdlib>
#include <doctest/doctest.h>
#include <fstream>
#include <linux/input.h>
#include <nlohmann/json.hpp>
#include <sstream>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

using namespace sagitta;
using test::at;

namespace {

/// A folder of its own, which is also the command's home.
class Place {
public:
    Place() {
        std::string pattern =
            (std::filesystem::temp_directory_path() / "sagitta_test_XXXXXX").string();
        REQUIRE(::mkdtemp(pattern.data()) != nullptr);
        m_folder = pattern;
    }
    ~Place() {
        std::error_code error;
        std::filesystem::remove_all(m_folder, error);
    }
    Place(const Place&) = delete;
    Place& operator=(const Place&) = delete;
    [[nodiscard]] std::filesystem::path operator/(const char* name) const {
        return m_folder / name;
    }

    struct Ran {
        int code;
        std::string out;
        std::string err;
    };
    [[nodiscard]] Ran run(const std::string& arguments) const {
        const std::string folder = m_folder.string();
        const std::string line = "cd " + folder + " && env -i HOME=" + folder + " TZ=UTC " +
                                 SAGITTA_BINARY + " " + arguments + " >out.txt 2>err.txt";
        const int status = std::system(line.c_str());
        return {WIFEXITED(status) ? WEXITSTATUS(status) : -1, read("out.txt"), read("err.txt")};
    }
    [[nodiscard]] std::string read(const char* name) const {
        std::ifstream stream{m_folder / name};
        std::stringstream text;
        text << stream.rdbuf();
        return text.str();
    }

private:
    std::filesystem::path m_folder;
};

/// A store with one pointer and three movements.
void make_store(const std::filesystem::path& file) {
    auto opened = store::Store::open(file, store::Mode::read_write, at(2026, 11, 23, 9));
    REQUIRE(opened.has_value());
    estimator::PointerDescription description;
    description.name = "Mouse, \"upright\"";
    const auto calibration =
        estimator::calibrate(description, estimator::Cpi::of(800.0), estimator::CpiSource::config,
                             estimator::Gain::unity());
    const auto id = opened->store.pointer(description, calibration, at(2026, 11, 23, 9));
    REQUIRE(id.has_value());
    store::Batch batch;
    for (int i = 0; i < 3; ++i) {
        auto hour = test::hour_of(at(2026, 11, 23, 9 + i), *id, 1, 800.0 + i);
        estimator::Scores scores;
        scores.distance = estimator::Pixels::of(100.0 + i);
        scores.path = estimator::Pixels::of(110.0);
        scores.movement_time = estimator::Micros{812'345};
        scores.flags = 2;
        const report::UtcTime press = at(2026, 11, 23, 9 + i) + estimator::Micros{1'000'001};
        batch.movements.push_back({press - scores.movement_time, press, *id, store::k_unlabelled,
                                   estimator::MovementKind::click, estimator::Button::left,
                                   scores});
        batch.hours.push_back(hour);
    }
    REQUIRE(opened->store.append(batch).has_value());
}

void add_event(std::string& raw, std::int64_t micros, std::uint16_t type, std::uint16_t code,
               std::int32_t value) {
    input_event event{};
    event.input_event_sec = micros / 1'000'000;
    event.input_event_usec = micros % 1'000'000;
    event.type = type;
    event.code = code;
    event.value = value;
    raw.append(reinterpret_cast<const char*>(&event), sizeof event);
}

/// A raw recording: one smooth movement of 240 counts in half a second, a click, a rest.
void make_recording(const std::filesystem::path& file, std::int64_t start_us) {
    std::string raw;
    std::int64_t time = start_us;
    double at_counts = 0;
    for (int i = 1; i <= 60; ++i) {
        time += 8000;
        const double s = i / 60.0;
        const double to = 240.0 * s * s * s * (10 - 15 * s + 6 * s * s);
        const int step = static_cast<int>(std::lround(to) - std::lround(at_counts));
        at_counts = to;
        if (step != 0) {
            add_event(raw, time, EV_REL, REL_X, step);
            add_event(raw, time, EV_SYN, SYN_REPORT, 0);
        }
    }
    for (const int value : {1, 0}) {
        time += 100'000;
        add_event(raw, time, EV_KEY, BTN_LEFT, value);
        add_event(raw, time, EV_SYN, SYN_REPORT, 0);
    }
    std::ofstream{file, std::ios::binary} << raw;
}

constexpr std::int64_t k_start_us = 1'795'424'400'000'000; // 2026-11-23T09:00:00Z

} // namespace

TEST_CASE("help and version succeed, and every help ends with an example") {
    const Place place;
    CHECK(place.run("--version").out.find("sagitta ") == 0);
    for (const char* command : {"", "week", "devices", "replay", "record", "export", "check",
                                "demo", "status", "pause", "resume", "label"}) {
        CAPTURE(command);
        const auto ran = place.run(std::string{command} + " --help");
        CHECK(ran.code == 0);
        const std::size_t example = ran.out.rfind("Example: sagitta");
        REQUIRE(example != std::string::npos);
        CHECK(ran.out.find_first_not_of('\n', ran.out.find('\n', example)) == std::string::npos);
    }
}

TEST_CASE("a command that does not exist is named, with the one that was probably meant") {
    const Place place;
    const auto ran = place.run("wek");
    CHECK(ran.code == 2);
    CHECK(ran.err ==
          "sagitta: 'wek' is not a command (did you mean week?); see 'sagitta --help'\n");
}

TEST_CASE("wrong usage exits 2 with a sentence on standard error") {
    const Place place;
    for (const char* line :
         {"", "nonsense", "week --ending yesterday", "week --by colour", "replay",
          "export --format xml", "export", "replay --cpi 0 x", "replay --start noon x",
          "demo --weeks 0", "replay --start 2026-11-23 a b"}) {
        CAPTURE(line);
        const auto ran = place.run(line);
        CHECK(ran.code == 2);
        CHECK(ran.out.empty());
        CHECK(ran.err.find("--help'") != std::string::npos);
    }
}

TEST_CASE("what could not be done exits 1 and says what to do next") {
    const Place place;
    for (const char* line : {"week", "week --store none.db", "export --format csv --store none.db",
                             "replay none.raw", "status", "week --config none.yaml", "check"}) {
        CAPTURE(line);
        const auto ran = place.run(line);
        CHECK(ran.code == 1);
        CHECK((ran.err + ran.out).size() > 20);
    }
    CHECK(place.run("week").err.find("sagitta demo") != std::string::npos);
    CHECK_FALSE(std::filesystem::exists(place / "none.db"));
}

TEST_CASE("exported movements read back as they were stored, options before or after") {
    const Place place;
    make_store(place / "test.db");
    const auto csv = place.run("--store test.db export --format csv");
    REQUIRE(csv.code == 0);
    CHECK(csv.out.find("start_utc,press_utc,pointer,condition,kind,button,distance_px,") == 0);
    CHECK(csv.out.find("2026-11-23T09:00:00.187656Z,2026-11-23T09:00:01.000001Z,"
                       "\"Mouse, \"\"upright\"\"\",,click,left,100,") != std::string::npos);
    const auto jsonl = place.run("export --format jsonl --store test.db --pointer Mouse "
                                 "--from 2026-11-23T10:00Z --to 2026-11-23T11:00Z");
    REQUIRE(jsonl.code == 0);
    const auto row = nlohmann::json::parse(jsonl.out);
    CHECK(row["distance_px"] == 101.0);
    CHECK(row["movement_time_ms"] == 812.345);
    CHECK(row["flags"] == 2);
    CHECK(row["pointer"] == "Mouse, \"upright\"");
    CHECK(place.run("export --format csv --store test.db --pointer nobody").code == 1);
    const auto hours = place.run("export --table hours --format jsonl --store test.db");
    CHECK(std::count(hours.out.begin(), hours.out.end(), '\n') == 3);
    const auto hour = nlohmann::json::parse(hours.out.substr(0, hours.out.find('\n')));
    CHECK(hour["scored_click"] == 1);
    CHECK(hour["hour_utc"] == "2026-11-23T09:00:00.000000Z");
}

TEST_CASE("week and devices print JSON that parses") {
    const Place place;
    make_store(place / "test.db");
    const auto week = place.run("week --ending 2026-11-25 --json --store test.db");
    CHECK(week.code == 0);
    CHECK(nlohmann::json::parse(week.out)["pointers"][0]["scored_clicks"] == 3);
    CHECK(place.run("week --ending 2026-12-25 --store test.db").out.find("nothing was recorded") !=
          std::string::npos);
    const auto devices = place.run("devices --json --store test.db");
    CHECK(devices.code == 0);
    CHECK(nlohmann::json::parse(devices.out)["stored"].size() == 1);
}

TEST_CASE("a recording is stored once, however often it is replayed") {
    const Place place;
    make_recording(place / "one.raw", k_start_us);
    const std::string line = "replay --store test.db --pointer Mouse --cpi 1000 --json one.raw";
    const auto first = place.run(line);
    REQUIRE_MESSAGE(first.code == 0, first.err);
    const auto json = nlohmann::json::parse(first.out);
    CHECK(json["presses"] == 1);
    CHECK(json["scored_movements"] == 1);
    CHECK(json["recordings"][0]["pointers"][0] == "Mouse");
    const auto second = place.run(line);
    CHECK(second.code == 1);
    CHECK(second.err.find("one.raw") != std::string::npos);
    const auto week =
        nlohmann::json::parse(place.run("week --ending 2026-11-23 --json --store test.db").out);
    CHECK(week["scored_movements"] == 1);
    CHECK(week["exposure"]["presses"] == 1);
}

TEST_CASE("stamps that are no dates need --start to be stored") {
    const Place place;
    make_recording(place / "one.raw", 5'000'000);
    CHECK(place.run("replay one.raw").code == 0);
    const auto refused = place.run("replay --store test.db one.raw");
    CHECK(refused.code == 1);
    CHECK(refused.err.find("--start") != std::string::npos);
    const auto placed = place.run("replay --store test.db --start 2026-11-23T09:00:00Z one.raw");
    CHECK_MESSAGE(placed.code == 0, placed.err);
    CHECK(place.run("export --format csv --store test.db").out.find("2026-11-23T09:00:00.") !=
          std::string::npos);
}

TEST_CASE("a recording named as the store by mistake stays where it is, and no store is made") {
    const Place place;
    make_recording(place / "one.raw", k_start_us);
    const auto swapped = place.run("replay --store one.raw one.raw");
    CHECK(swapped.code == 1);
    CHECK(swapped.err.find("one.raw is no store") != std::string::npos);
    CHECK(std::filesystem::exists(place / "one.raw"));
    CHECK(place.run("replay --store new.db nowhere.raw").code == 1);
    CHECK_FALSE(std::filesystem::exists(place / "new.db"));
}

TEST_CASE("a bad recording is named and the ones before it stay") {
    const Place place;
    make_recording(place / "good.raw", k_start_us);
    std::ofstream{place / "bad.raw"} << "no recording at all\n";
    const auto ran = place.run("replay --store test.db good.raw bad.raw");
    CHECK(ran.code == 1);
    CHECK(ran.err.find("bad.raw") != std::string::npos);
    CHECK(ran.err.find("1 recording before it") != std::string::npos);
    const auto rows = place.run("export --format csv --store test.db").out;
    CHECK(std::count(rows.begin(), rows.end(), '\n') == 2);
}
