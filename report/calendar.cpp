#include "report/calendar.hpp"

#include <array>
#include <cstdlib>
#include <date/tz.h>
#include <fmt/format.h>
#include <optional>
#include <sstream>

namespace sagitta::report {
namespace {

using estimator::ErrorCode;
using estimator::fail;
using estimator::Micros;
using LocalTime = date::local_time<Micros>;

constexpr std::array<const char*, 12> k_months = {"January",   "February", "March",    "April",
                                                  "May",       "June",     "July",     "August",
                                                  "September", "October",  "November", "December"};

const char* month_name(date::year_month_day day) {
    return k_months.at(static_cast<unsigned>(day.month()) - 1);
}

/// The zone that the TZ variable names, in its usual forms "Area/City" and ":Area/City".
std::string zone_from_environment() {
    const char* value = std::getenv("TZ");
    if (value == nullptr) {
        return {};
    }
    std::string name = value;
    if (!name.empty() && name.front() == ':') {
        name.erase(0, 1);
    }
    return name;
}

/// Cuts the zone from the end of an ISO time: Z, +hh:mm, +hhmm or -hh. Nothing when there is none.
std::optional<std::chrono::minutes> take_offset(std::string_view& text, std::size_t time_begin) {
    if (text.ends_with('Z')) {
        text.remove_suffix(1);
        return std::chrono::minutes{0};
    }
    const std::size_t sign = text.find_last_of("+-");
    if (sign == std::string_view::npos || sign < time_begin) {
        return std::nullopt;
    }
    std::string digits;
    for (const char c : text.substr(sign + 1)) {
        if (c != ':') {
            digits += c;
        }
    }
    if ((digits.size() != 2 && digits.size() != 4) ||
        digits.find_first_not_of("0123456789") != std::string::npos) {
        return std::nullopt;
    }
    const int hours = std::stoi(digits.substr(0, 2));
    const int minutes = digits.size() == 4 ? std::stoi(digits.substr(2)) : 0;
    if (hours > 14 || minutes > 59) {
        return std::nullopt;
    }
    const int total = hours * 60 + minutes;
    const bool west = text[sign] == '-';
    text = text.substr(0, sign);
    return std::chrono::minutes{west ? -total : total};
}

/// Parses all of `text` by a strptime-like format.
template <class Value>
bool parse_all(std::string_view text, const char* format, Value& value) {
    std::istringstream stream{std::string{text}};
    stream >> date::parse(format, value);
    return !stream.fail() && stream.peek() == std::istringstream::traits_type::eof();
}

} // namespace

Calendar Calendar::in_utc() {
    return {};
}

Result<Calendar> Calendar::in_zone(const std::string& zone_name) {
    Calendar calendar;
    try {
        static_cast<void>(date::get_tzdb());
    } catch (const std::exception&) {
        calendar.m_remark = "Days are those of UTC, since this machine has no time zone files; "
                            "install the package tzdata to see your own.";
        return calendar;
    }
    const std::string from_environment = zone_from_environment();
    const std::string& wanted = zone_name.empty() ? from_environment : zone_name;
    if (!wanted.empty()) {
        try {
            calendar.m_zone = date::locate_zone(wanted);
            calendar.m_zone_name = calendar.m_zone->name();
            return calendar;
        } catch (const std::exception&) {
            if (!zone_name.empty()) {
                return fail(ErrorCode::bad_value,
                            "time_zone '" + zone_name +
                                "' is not in this machine's time zone files; use an IANA name "
                                "such as Europe/Oslo, or leave it empty for the system's zone");
            }
        }
    }
    try {
        calendar.m_zone = date::current_zone();
        calendar.m_zone_name = calendar.m_zone->name();
    } catch (const std::exception&) {
        calendar.m_remark = "Days are those of UTC, since this machine's time zone could not be "
                            "found; set time_zone in the config to see your own.";
    }
    return calendar;
}

LocalTime Calendar::to_local(UtcTime time) const {
    if (m_zone == nullptr) {
        return LocalTime{time.time_since_epoch()};
    }
    const auto info = m_zone->get_info(std::chrono::floor<std::chrono::seconds>(time));
    return LocalTime{time.time_since_epoch() + info.offset};
}

Day Calendar::day_of(UtcTime time) const {
    return date::floor<date::days>(to_local(time));
}

int Calendar::hour_of(UtcTime time) const {
    const LocalTime local = to_local(time);
    const auto since_midnight = local - date::floor<date::days>(local);
    return static_cast<int>(std::chrono::floor<std::chrono::hours>(since_midnight).count());
}

UtcTime Calendar::start_of(Day day) const {
    return to_utc(LocalTime{day});
}

UtcTime Calendar::to_utc(LocalTime time) const {
    if (m_zone == nullptr) {
        return UtcTime{time.time_since_epoch()};
    }
    return m_zone->to_sys(time, date::choose::earliest);
}

Day monday_of(Day day) {
    const date::weekday weekday{day};
    return day - (weekday - date::Monday);
}

IsoWeek iso_week_of(Day day) {
    const Day thursday = monday_of(day) + date::days{3};
    const date::year year = date::year_month_day{thursday}.year();
    const Day new_year{date::local_days{year / date::January / 1}};
    return {int{year}, static_cast<int>((thursday - new_year).count()) / 7 + 1};
}

std::string to_text(Day day) {
    const date::year_month_day ymd{day};
    return fmt::format("{:04}-{:02}-{:02}", int{ymd.year()}, unsigned{ymd.month()},
                       unsigned{ymd.day()});
}

std::string day_text(Day day) {
    constexpr std::array<const char*, 7> k_weekdays = {
        "Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday"};
    const date::year_month_day ymd{day};
    return fmt::format("{} {} {}",
                       k_weekdays.at(static_cast<std::size_t>((day - monday_of(day)).count())),
                       unsigned{ymd.day()}, month_name(ymd));
}

std::string span_text(Day first, Day last) {
    const date::year_month_day a{first};
    const date::year_month_day b{last};
    const std::string end =
        fmt::format("{} {} {}", unsigned{b.day()}, month_name(b), int{b.year()});
    if (a.year() != b.year()) {
        return fmt::format("{} {} {} to {}", unsigned{a.day()}, month_name(a), int{a.year()}, end);
    }
    if (a.month() != b.month()) {
        return fmt::format("{} {} to {}", unsigned{a.day()}, month_name(a), end);
    }
    return fmt::format("{} to {}", unsigned{a.day()}, end);
}

std::string to_iso(UtcTime time) {
    const auto day = std::chrono::floor<date::days>(time);
    const date::year_month_day ymd{date::sys_days{day.time_since_epoch()}};
    const std::int64_t micros = (time - day).count();
    return fmt::format("{:04}-{:02}-{:02}T{:02}:{:02}:{:02}.{:06}Z", int{ymd.year()},
                       unsigned{ymd.month()}, unsigned{ymd.day()}, micros / 3'600'000'000,
                       micros / 60'000'000 % 60, micros / 1'000'000 % 60, micros % 1'000'000);
}

Result<Day> parse_day(std::string_view text) {
    Day day{};
    if (text.size() == 10 && parse_all(text, "%F", day)) {
        return day;
    }
    return fail(
        ErrorCode::bad_value,
        fmt::format("'{}' is not a date; write it as YYYY-MM-DD, such as 2026-11-29", text));
}

Result<UtcTime> parse_time(std::string_view text, const Calendar& calendar) {
    if (const Result<Day> day = parse_day(text)) {
        return calendar.start_of(*day);
    }
    std::string_view rest = text;
    const std::optional<std::chrono::minutes> offset = take_offset(rest, 11);
    for (const char* format : {"%FT%T", "%FT%H:%M", "%F %T", "%F %H:%M"}) {
        LocalTime local{};
        if (parse_all(rest, format, local)) {
            return offset ? UtcTime{local.time_since_epoch() - *offset} : calendar.to_utc(local);
        }
    }
    return fail(ErrorCode::bad_value,
                fmt::format("'{}' is not a time; write a date such as 2026-11-29 or a time such "
                            "as 2026-11-29T09:30:00Z",
                            text));
}

} // namespace sagitta::report
