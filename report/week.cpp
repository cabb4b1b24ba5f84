#include "report/week.hpp"

namespace sagitta::report {

Result<WeekSummary> read_week(const store::Store& store, Day day, const Session& session) {
    const auto pointers = store.pointers();
    if (!pointers) {
        return tl::unexpected{pointers.error()};
    }
    const auto conditions = store.conditions();
    if (!conditions) {
        return tl::unexpected{conditions.error()};
    }
    WeekBuilder builder{monday_of(day),
                        session.calendar,
                        {session.settings.standard_distance, session.settings.confidence}};
    const auto read = store.for_each_hour(
        builder.selection(), [&](const store::StoredHour& hour) { builder.add(hour); });
    if (!read) {
        return tl::unexpected{read.error()};
    }
    return builder.build(*pointers, *conditions);
}

Result<Output> run_week(const WeekRequest& request, const Session& session) {
    Day day = session.calendar.day_of(session.now);
    if (request.ending) {
        const Result<Day> asked = parse_day(*request.ending);
        if (!asked) {
            return tl::unexpected{asked.error()};
        }
        day = *asked;
    }
    const auto store = open_for_reading(session);
    if (!store) {
        return tl::unexpected{store.error()};
    }
    const auto week = read_week(*store, day, session);
    if (!week) {
        return tl::unexpected{week.error()};
    }
    const auto last_hour = store->last_hour();
    if (!last_hour) {
        return tl::unexpected{last_hour.error()};
    }
    return Output{session.json ? week_json(*week, request.detail, session)
                               : week_text(*week, request.detail, session, *last_hour)};
}

} // namespace sagitta::report
