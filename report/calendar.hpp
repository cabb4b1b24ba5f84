// Days, hours and ISO weeks in the person's time zone. Values only, apart from the zone's rules,
// which come from the system's time zone files.
#pragma once

#include "estimator/result.hpp"
#include "estimator/units.hpp"

#include <date/date.h>
#include <string>
#include <string_view>

namespace date {
class time_zone;
}

namespace sagitta::report {

using estimator::Result;
using estimator::UtcTime;
using Day = date::local_days;

/// Turns UTC into the person's days and back.
class Calendar {
public:
    /// @param zone_name  IANA name; empty: the TZ variable, else the system's zone. When the system
    ///                   has no zone files, UTC stands in and remark() says so.
    /// @return ErrorCode::bad_value for a name that is not in the time zone files
    [[nodiscard]] static Result<Calendar> in_zone(const std::string& zone_name);
    /// UTC, for tests and as the last resort.
    [[nodiscard]] static Calendar in_utc();

    [[nodiscard]] const std::string& zone_name() const { return m_zone_name; }
    /// Empty, or one sentence on why UTC stands in for the person's zone.
    [[nodiscard]] const std::string& remark() const { return m_remark; }

    [[nodiscard]] Day day_of(UtcTime time) const;
    /// Hour of the day, 0 to 23.
    [[nodiscard]] int hour_of(UtcTime time) const;
    /// The first moment of the day.
    [[nodiscard]] UtcTime start_of(Day day) const;
    /// A local wall time as UTC; the earlier one where a clock change makes it ambiguous.
    [[nodiscard]] UtcTime to_utc(date::local_time<estimator::Micros> time) const;

private:
    Calendar() = default;
    [[nodiscard]] date::local_time<estimator::Micros> to_local(UtcTime time) const;

    const date::time_zone* m_zone = nullptr; ///< null: UTC
    std::string m_zone_name = "UTC";
    std::string m_remark;
};

/// The Monday that begins the ISO week of a day.
[[nodiscard]] Day monday_of(Day day);

struct IsoWeek {
    int year;
    int week; ///< 1 to 53
};
/// Source: ISO 8601-1:2019, 3.1.1.23: week 1 holds the year's first Thursday.
[[nodiscard]] IsoWeek iso_week_of(Day day);

/// "2026-11-23".
[[nodiscard]] std::string to_text(Day day);
/// "Wednesday 25 November".
[[nodiscard]] std::string day_text(Day day);
/// "23 to 29 November 2026", naming month and year only where they differ.
[[nodiscard]] std::string span_text(Day first, Day last);
/// "2026-11-23T09:30:00.000125Z".
[[nodiscard]] std::string to_iso(UtcTime time);

/// A calendar day, "2026-11-23". @return ErrorCode::bad_value naming the text
[[nodiscard]] Result<Day> parse_day(std::string_view text);
/// A day (its first moment) or a time, "2026-11-23T09:30[:00[.000125]][Z|+01:00]"; a space may
/// stand for the T. Without a zone it is the person's wall time.
/// @return ErrorCode::bad_value naming the text
[[nodiscard]] Result<UtcTime> parse_time(std::string_view text, const Calendar& calendar);

} // namespace sagitta::report
