#include "report/calendar.hpp"
#include "tests/report/hours.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace sagitta::report;
using test::at;
using test::day_of;

TEST_CASE("a day is named with its weekday and month") {
    CHECK(day_text(date::local_days{date::year{2026} / 11 / 25}) == "Wednesday 25 November");
    CHECK(day_text(date::local_days{date::year{2027} / 1 / 3}) == "Sunday 3 January");
}

TEST_CASE("ISO weeks begin on Monday and belong to the year of their Thursday") {
    CHECK(monday_of(day_of(2026, 11, 29)) == day_of(2026, 11, 23));
    CHECK(monday_of(day_of(2026, 11, 23)) == day_of(2026, 11, 23));
    // Source: ISO 8601-1:2019; 2026 has 53 weeks, since its 1 January is a Thursday.
    CHECK(iso_week_of(day_of(2026, 11, 29)).week == 48);
    CHECK(iso_week_of(day_of(2026, 12, 31)).week == 53);
    CHECK(iso_week_of(day_of(2027, 1, 3)).week == 53);
    CHECK(iso_week_of(day_of(2027, 1, 3)).year == 2026);
    CHECK(iso_week_of(day_of(2027, 1, 4)).week == 1);
    CHECK(iso_week_of(day_of(2024, 12, 30)).year == 2025);
    CHECK(iso_week_of(day_of(2024, 12, 30)).week == 1);
}

TEST_CASE("a span names month and year only where they differ") {
    CHECK(span_text(day_of(2026, 11, 23), day_of(2026, 11, 29)) == "23 to 29 November 2026");
    CHECK(span_text(day_of(2026, 11, 30), day_of(2026, 12, 6)) == "30 November to 6 December 2026");
    CHECK(span_text(day_of(2026, 12, 28), day_of(2027, 1, 3)) ==
          "28 December 2026 to 3 January 2027");
}

TEST_CASE("a time prints in UTC with microseconds and parses back to itself") {
    const UtcTime time = at(2026, 11, 23, 9) + estimator::Micros{1'800'000'125};
    CHECK(to_iso(time) == "2026-11-23T09:30:00.000125Z");
    const Calendar utc = Calendar::in_utc();
    CHECK(parse_time(to_iso(time), utc).value() == time);
    CHECK(parse_time("2026-11-23T10:30:00.000125+01:00", utc).value() == time);
    CHECK(parse_time("2026-11-23 09:30", utc).value() ==
          at(2026, 11, 23, 9) + std::chrono::minutes{30});
    CHECK(parse_time("2026-11-23", utc).value() == at(2026, 11, 23, 0));
}

TEST_CASE("what is no date or time is refused, naming it") {
    const Calendar utc = Calendar::in_utc();
    for (const char* text : {"", "2026-02-30", "2026-13-01", "yesterday", "2026-11-23T25:00",
                             "2026-11-23T09:30:00Zz", "2026-11-23x", "26-11-23"}) {
        CAPTURE(text);
        const auto time = parse_time(text, utc);
        REQUIRE_FALSE(time.has_value());
        CHECK(time.error().code == estimator::ErrorCode::bad_value);
        CHECK(time.error().message.find(text) != std::string::npos);
    }
    CHECK_FALSE(parse_day("2026-11-23T00:00").has_value());
}

TEST_CASE("days and hours follow the zone through a clock change") {
    const auto oslo = Calendar::in_zone("Europe/Oslo");
    if (!oslo || !oslo->remark().empty()) {
        MESSAGE("no time zone files here: nothing to test");
        return;
    }
    // Source: EU Directive 2000/84/EC: summer time ends on the last Sunday of October, 01:00 UTC.
    CHECK(oslo->day_of(at(2026, 10, 24, 22)) == day_of(2026, 10, 25));
    CHECK(oslo->hour_of(at(2026, 10, 24, 22)) == 0);
    CHECK(oslo->hour_of(at(2026, 10, 25, 0)) == 2);
    CHECK(oslo->hour_of(at(2026, 10, 25, 1)) == 2);
    CHECK(oslo->day_of(at(2026, 10, 25, 22)) == day_of(2026, 10, 25));
    CHECK(oslo->day_of(at(2026, 10, 25, 23)) == day_of(2026, 10, 26));
    CHECK(oslo->start_of(day_of(2026, 10, 25)) == at(2026, 10, 24, 22));
}

TEST_CASE("an unknown zone is refused, unless the machine has no zone files") {
    const auto nowhere = Calendar::in_zone("Nowhere/Atall");
    if (nowhere) {
        CHECK_FALSE(nowhere->remark().empty());
    } else {
        CHECK(nowhere.error().code == estimator::ErrorCode::bad_value);
    }
}
