#include "report/export.hpp"
#include "report/rows.hpp"
#include "tests/report/hours.hpp"

#include <cmath>
#include <doctest/doctest.h>
#include <nlohmann/json.hpp>

using namespace sagitta;
using namespace sagitta::report;

namespace {

template <class Write>
std::string written(RowFormat format, Write write) {
    std::FILE* file = std::tmpfile();
    REQUIRE(file != nullptr);
    RowWriter rows{format, {"when", "name", "value", "count"}, file};
    write(rows);
    REQUIRE(rows.finish().has_value());
    std::rewind(file);
    std::string text(4096, '\0');
    text.resize(std::fread(text.data(), 1, text.size(), file));
    std::fclose(file);
    return text;
}

void one_row(RowWriter& rows, const char* name, double value) {
    rows.time(test::at(2026, 11, 23, 9) + estimator::Micros{125});
    rows.text(name);
    rows.number(value);
    rows.whole(-7);
    rows.end_row();
}

} // namespace

TEST_CASE("CSV quotes what RFC 4180 asks for and leaves a missing number empty") {
    const std::string text = written(RowFormat::csv, [](RowWriter& rows) {
        one_row(rows, "plain", 0.1);
        one_row(rows, "with, \"quotes\"\nand a line", std::nan(""));
    });
    CHECK(text == "when,name,value,count\n"
                  "2026-11-23T09:00:00.000125Z,plain,0.1,-7\n"
                  "2026-11-23T09:00:00.000125Z,\"with, \"\"quotes\"\"\nand a line\",,-7\n");
}

TEST_CASE("JSON Lines escapes text and writes null for a missing number") {
    const std::string text = written(
        RowFormat::jsonl, [](RowWriter& rows) { one_row(rows, "a \"b\" \\ \n", std::nan("")); });
    const auto json = nlohmann::json::parse(text);
    CHECK(json["name"] == "a \"b\" \\ \n");
    CHECK(json["value"].is_null());
    CHECK(json["when"] == "2026-11-23T09:00:00.000125Z");
    CHECK(json["count"] == -7);
}

TEST_CASE("numbers read back exactly") {
    for (const double value : {0.1, 1.0 / 3.0, 6.02214076e23, -1e-7, 123456789.125, 5e-324}) {
        const std::string text =
            written(RowFormat::jsonl, [&](RowWriter& rows) { one_row(rows, "x", value); });
        CHECK(nlohmann::json::parse(text)["value"].get<double>() == value);
    }
}

TEST_CASE("a full disk is an error, not silence") {
    std::FILE* full = std::fopen("/dev/full", "w");
    if (full == nullptr) {
        return;
    }
    RowWriter rows{RowFormat::csv, {"a"}, full};
    const auto finished = rows.finish();
    REQUIRE_FALSE(finished.has_value());
    CHECK(finished.error().code == estimator::ErrorCode::no_space);
    std::fclose(full);
}

TEST_CASE("the movement columns are those of the published order") {
    std::string header;
    for (const std::string& name : movement_columns()) {
        header += (header.empty() ? "" : ",") + name;
    }
    CHECK(header == "start_utc,press_utc,pointer,condition,kind,button,distance_px,direction_deg,"
                    "movement_time_ms,dwell_ms,path_px,path_ratio,error_px,offset_px,"
                    "variability_px,max_deviation_px,axis_crossings,direction_changes,"
                    "orthogonal_changes,peak_speed_mm_s,time_to_peak_ms,submovements,"
                    "primary_fraction,primary_lateral_px,initial_angle_deg,smoothness_sparc,"
                    "smoothness_ldlj,hand_travel_mm,reports,flags");
}
