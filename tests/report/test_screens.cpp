// Golden text of the screens. To accept a changed screen: run with SAGITTA_REWRITE_GOLDEN=1 and
// read the difference.
#include "report/check.hpp"
#include "report/devices.hpp"
#include "report/first_look.hpp"
#include "report/replay_summary.hpp"
#include "report/table.hpp"
#include "report/week.hpp"
#include "tests/report/hours.hpp"

#include <cstdlib>
#include <doctest/doctest.h>
#include <fstream>
#include <nlohmann/json.hpp>
#include <sstream>

using namespace sagitta;
using namespace sagitta::report;
using namespace sagitta::test;

namespace {

void check_golden(const std::string& name, const std::string& text) {
    const std::string file = std::string{SAGITTA_TEST_DATA} + "/report/golden/" + name + ".txt";
    if (std::getenv("SAGITTA_REWRITE_GOLDEN") != nullptr) {
        std::ofstream{file} << text;
    }
    std::ifstream stream{file};
    std::stringstream golden;
    golden << stream.rdbuf();
    CHECK(text == golden.str());
    std::istringstream lines{text};
    for (std::string line; std::getline(lines, line);) {
        const bool is_command = line.find("-> ") != std::string::npos; // to be copied whole
        CHECK_MESSAGE((is_command || width_of(line) <= 100), line);
    }
}

WeekSummary a_week(const Session& session, bool with_weeks_before) {
    WeekBuilder builder{day_of(2026, 11, 23), session.calendar, {}};
    for (unsigned day = 2; with_weeks_before && day <= 20; ++day) {
        builder.add(hour_of(at(2026, 11, day, 9), k_mouse, 40, 1000 + 7.0 * (day % 4)));
    }
    for (unsigned day = 23; day <= 27; ++day) {
        builder.add(hour_of(at(2026, 11, day, 9), k_mouse, 40 + static_cast<int>(day),
                            900 + 6.0 * (day % 3)));
        if (day < 25) {
            auto hour = hour_of(at(2026, 11, day, 14), k_trackball, 30, 1100);
            hour.summary.outcomes[static_cast<std::size_t>(estimator::Outcome::repeat_press)] = 4;
            hour.summary.outcomes[static_cast<std::size_t>(estimator::Outcome::no_press)] = 21;
            builder.add(hour);
        }
    }
    auto mouse = pointer_of(k_mouse, "Upright mouse");
    mouse.cpi_source = estimator::CpiSource::assumed;
    return builder.build(
        {mouse, pointer_of(k_trackball, "Thumb trackball", estimator::Origin::simulated)},
        {{store::k_unlabelled, ""}});
}

} // namespace

TEST_CASE("the week's screen stays as it was read and approved") {
    const Session session = plain_session();
    check_golden("week", week_text(a_week(session, true), WeekDetail::summary, session));
    check_golden("week_first", week_text(a_week(session, false), WeekDetail::summary, session));
    check_golden("week_by_direction",
                 week_text(a_week(session, true), WeekDetail::by_direction, session));
    check_golden("week_by_hour", week_text(a_week(session, true), WeekDetail::by_hour, session));
}

TEST_CASE("an empty week says where the data are") {
    const Session session = plain_session();
    WeekSummary empty;
    empty.monday = day_of(2026, 11, 23);
    check_golden("week_empty", week_text(empty, WeekDetail::summary, session, at(2026, 10, 2, 9)));
    const std::string text = week_text(empty, WeekDetail::summary, session, std::nullopt);
    CHECK(text.find("sagitta check") != std::string::npos);
}

TEST_CASE("every screen with simulated data says so, and live ones do not") {
    const Session session = plain_session();
    for (const WeekDetail detail :
         {WeekDetail::summary, WeekDetail::by_direction, WeekDetail::by_hour}) {
        CHECK(week_text(a_week(session, true), detail, session).find("SIMULATED") !=
              std::string::npos);
    }
    WeekSummary live = a_week(session, true);
    live.series.pop_back();
    CHECK(week_text(live, WeekDetail::summary, session).find("SIMULATED") == std::string::npos);
}

TEST_CASE("colour stands only around words that are there without it") {
    Session session = plain_session();
    const WeekSummary week = a_week(session, true);
    const std::string plain_text = week_text(week, WeekDetail::summary, session);
    CHECK(plain_text.find('\033') == std::string::npos);
    session.style.colour = true;
    std::string coloured = week_text(week, WeekDetail::summary, session);
    REQUIRE(coloured.find('\033') != std::string::npos);
    for (const std::string code : {"\033[1m", "\033[33m", "\033[0m"}) {
        for (std::size_t found; (found = coloured.find(code)) != std::string::npos;) {
            coloured.erase(found, code.size());
        }
    }
    CHECK(coloured == plain_text);
}

TEST_CASE("the week's JSON is valid and holds what the screen shows") {
    const Session session = plain_session();
    const auto json =
        nlohmann::json::parse(week_json(a_week(session, true), WeekDetail::by_direction, session));
    CHECK(json["iso_week"] == 48);
    CHECK(json["first_day"] == "2026-11-23");
    CHECK(json["simulated"] == true);
    CHECK(json["outcomes"]["repeat_press"] == 8);
    const auto& mouse = json["pointers"][0];
    CHECK(mouse["pointer"] == "Upright mouse");
    const auto& throughput = mouse["measures"]["implied_throughput_bit_per_s"];
    CHECK(throughput["change"] == "higher");
    CHECK(throughput["this_week"]["days"] == 5);
    CHECK(throughput["this_week"]["low"] < throughput["this_week"]["mean"]);
    CHECK(json["pointers"][1]["measures"]["error_px"]["this_week"]["low"].is_null());
    CHECK(mouse["directions"].size() == 8);
    const auto& chart = mouse["charts"]["movement_time_ms"];
    CHECK(chart["days_before"] == 19);
    CHECK(chart["flag"]["direction"] == "below");
    CHECK(chart["flag"]["since"] == "2026-11-23");
    CHECK(chart["flag"]["lasting"] == true);
    CHECK(chart["days"].size() == 5);
    CHECK(chart["days"][4]["statistic"] < chart["days"][4]["lower"]);
    CHECK(chart["trend"]["days"] == 24);
    CHECK(chart["trend"]["mann_kendall_p"] <= 1.0);
    CHECK(chart["trend"]["low"] <= chart["trend"]["per_week"]);
    CHECK(json["pointers"][1]["charts"]["error_px"]["flag"].is_null());
    CHECK(json["chart_rules"]["days_between_false_flags"] > 500.0);
    CHECK(json["caution"].get<std::string>().find("does not diagnose") != std::string::npos);
}

TEST_CASE("the replay's screen and JSON tell the same") {
    const Session session = plain_session();
    ReplaySummary summary;
    summary.cpi_assumed = true;
    ReplayedRecording one;
    one.file = "recordings/monday.raw";
    one.format = "raw";
    one.pointers = {"Upright mouse"};
    one.start = at(2026, 11, 23, 9);
    one.reports = 12'345;
    one.totals = hour_of(at(2026, 11, 23, 9), k_mouse, 40, 800).summary;
    one.totals.outcomes[static_cast<std::size_t>(estimator::Outcome::too_short)] = 10;
    one.remarks = {"the last event is cut, ignoring its 7 bytes"};
    summary.recordings = {one, one};
    check_golden("replay", replay_text(summary, session));
    const auto json = nlohmann::json::parse(replay_json(summary));
    CHECK(json["reports"] == 24'690);
    CHECK(json["scored_movements"] == 80);
    CHECK(json["outcomes"]["too_short"] == 20);
    CHECK(json["store"].is_null());
    CHECK(json["recordings"][0]["start_utc"] == "2026-11-23T09:00:00.000000Z");
}

TEST_CASE("check names each trouble and the command that mends it") {
    CheckFacts facts;
    facts.store_file = "/home/somebody/.local/share/sagitta/sagitta.db";
    facts.store_writable = true;
    facts.daemon_state = "recording";
    estimator::PointerDescription mouse;
    mouse.name = "Upright mouse";
    const DeviceHere fine{{"/dev/input/event3", mouse, true},
                          estimator::Cpi::of(800),
                          estimator::CpiSource::udev,
                          false};
    facts.pointers = {fine};
    const Session session = plain_session();
    CHECK(check_text(judge(facts), session).find("Nothing keeps") == 0);
    CHECK(nlohmann::json::parse(check_json(judge(facts)))["recording_works"] == true);

    facts.config_error = "sagitta.yaml:3:5: unknown key 'rest'; did you mean rest_ms?";
    facts.pointers[0].node.readable = false;
    facts.keyboard_pointers = {{"/dev/input/event5", mouse, false}};
    facts.store_writable = false;
    facts.daemon_error = "sagittad is not running";
    check_golden("check", check_text(judge(facts), session));
    const auto json = nlohmann::json::parse(check_json(judge(facts)));
    CHECK(json["recording_works"] == false);
    for (const auto& finding : json["findings"]) {
        CHECK((finding["severity"] == "fine") == finding["mend"].get<std::string>().empty());
    }
}

TEST_CASE("devices and first look keep to the screen's width") {
    const Session session = plain_session();
    DeviceList list;
    estimator::PointerDescription mouse;
    mouse.name = "A pointer whose maker gave it a very long name indeed";
    list.here = describe_devices({{"/dev/input/event3", mouse, true}}, session.settings);
    list.store_found = true;
    list.stored = {pointer_of(k_trackball, "Thumb trackball", estimator::Origin::simulated)};
    check_golden("devices", devices_text(list, session));
    CHECK(nlohmann::json::parse(devices_json(list))["here"][0]["cpi_source"] == "assumed");

    FirstLookBuilder builder{session.calendar, 0.95};
    for (unsigned day = 2; day <= 6; ++day) {
        builder.add(hour_of(at(2026, 11, day, 9), k_mouse, 40, 800 + 5.0 * (day % 3)));
        builder.add(hour_of(at(2026, 11, day, 14), k_trackball, 40, 860 + 5.0 * (day % 2)));
    }
    check_golden("first_look",
                 first_look_text(builder.build({pointer_of(k_mouse, "Upright mouse"),
                                                pointer_of(k_trackball, "Thumb trackball")}),
                                 session));
}
