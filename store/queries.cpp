// Reading.
#include "store/connection.hpp"
#include "store/hour_row.hpp"
#include "store/movement_row.hpp"

#include <array>
#include <limits>

namespace sagitta::store {

namespace {

using estimator::Micros;

constexpr std::array k_event_kinds{
    EventKind::started, EventKind::stopped,   EventKind::paused,       EventKind::resumed,
    EventKind::plugged, EventKind::unplugged, EventKind::lost_reports, EventKind::clock_step,
    EventKind::slept,   EventKind::set_aside, EventKind::replayed,     EventKind::settings};
constexpr std::array k_pointer_kinds{
    estimator::PointerKind::mouse, estimator::PointerKind::trackball,
    estimator::PointerKind::pointing_stick, estimator::PointerKind::touchpad,
    estimator::PointerKind::absolute};
constexpr std::array k_origins{estimator::Origin::live, estimator::Origin::recording,
                               estimator::Origin::simulated};
constexpr std::array k_cpi_sources{estimator::CpiSource::assumed, estimator::CpiSource::udev,
                                   estimator::CpiSource::config, estimator::CpiSource::command_line,
                                   estimator::CpiSource::axis_resolution};

/// The value whose name a column holds.
template <class Values>
std::optional<typename Values::value_type> named(const Values& values, std::string_view name) {
    for (const auto value : values) {
        if (to_text(value) == name) {
            return value;
        }
    }
    return std::nullopt;
}

/// Binds [from, to) and the pointer, in the order of k_selected.
void bind_selection(Statement& statement, const Selection& selection) {
    const auto micros = [](const std::optional<UtcTime>& time, std::int64_t otherwise) {
        return time ? time->time_since_epoch().count() : otherwise;
    };
    statement.bind_integer(micros(selection.from, std::numeric_limits<std::int64_t>::min()));
    statement.bind_integer(micros(selection.to, std::numeric_limits<std::int64_t>::max()));
    statement.bind_integer(selection.pointer.has_value()
                               ? std::optional{static_cast<std::int64_t>(*selection.pointer)}
                               : std::nullopt);
}

std::string selected(const char* time_column) {
    const std::string time{time_column};
    return " WHERE " + time + " >= ? AND " + time + " < ? AND pointer IS coalesce(?, pointer)";
}

/// Calls `take` for every row. @param take  returns false when a row makes no sense
template <class Take>
Result<void> for_each_row(Statement& statement, Take&& take, const Error& unreadable) {
    for (;;) {
        const auto row = statement.step();
        if (!row) {
            return tl::unexpected{row.error()};
        }
        if (!*row) {
            return {};
        }
        if (!take(statement)) {
            return tl::unexpected{unreadable};
        }
    }
}

UtcTime utc(const Statement& row, int column) {
    return UtcTime{Micros{row.integer(column)}};
}

std::optional<StoredPointer> read_pointer(const Statement& row) {
    const auto kind = named(k_pointer_kinds, row.text(6));
    const auto origin = named(k_origins, row.text(5));
    const auto source = named(k_cpi_sources, row.text(8));
    if (!kind || !origin || !source) {
        return std::nullopt;
    }
    return StoredPointer{.id = PointerId{row.integer(0)},
                         .name = std::string{row.text(1)},
                         .kind = *kind,
                         .origin = *origin,
                         .bus = static_cast<std::uint16_t>(row.integer(2)),
                         .vendor = static_cast<std::uint16_t>(row.integer(3)),
                         .product = static_cast<std::uint16_t>(row.integer(4)),
                         .cpi = estimator::Cpi::of(row.real(7)),
                         .cpi_source = *source,
                         .first_seen = utc(row, 9)};
}

std::optional<StoredEvent> read_event(const Statement& row) {
    const auto kind = named(k_event_kinds, row.text(1));
    if (!kind) {
        return std::nullopt;
    }
    return StoredEvent{.time = utc(row, 0),
                       .kind = *kind,
                       .pointer =
                           row.is_null(2) ? std::nullopt : std::optional{PointerId{row.integer(2)}},
                       .detail = std::string{row.text(3)}};
}

} // namespace

std::string_view to_text(EventKind kind) {
    switch (kind) {
    case EventKind::started:
        return "started";
    case EventKind::stopped:
        return "stopped";
    case EventKind::paused:
        return "paused";
    case EventKind::resumed:
        return "resumed";
    case EventKind::plugged:
        return "plugged";
    case EventKind::unplugged:
        return "unplugged";
    case EventKind::lost_reports:
        return "lost_reports";
    case EventKind::clock_step:
        return "clock_step";
    case EventKind::slept:
        return "slept";
    case EventKind::set_aside:
        return "set_aside";
    case EventKind::replayed:
        return "replayed";
    case EventKind::settings:
        return "settings";
    }
    return "unknown";
}

Result<std::vector<StoredPointer>> Store::pointers() const {
    auto select = m_connection->database.prepare(
        "SELECT id, name, bus, vendor, product, origin, kind, cpi, cpi_source, first_seen_us "
        "FROM pointer ORDER BY id");
    if (!select) {
        return tl::unexpected{select.error()};
    }
    std::vector<StoredPointer> pointers;
    const auto take = [&pointers](const Statement& row) {
        auto pointer = read_pointer(row);
        if (pointer) {
            pointers.push_back(std::move(*pointer));
        }
        return pointer.has_value();
    };
    return for_each_row(*select, take, m_connection->unreadable_row("pointer")).map([&] {
        return std::move(pointers);
    });
}

Result<std::vector<StoredCondition>> Store::conditions() const {
    auto select = m_connection->database.prepare("SELECT id, label FROM condition ORDER BY id");
    if (!select) {
        return tl::unexpected{select.error()};
    }
    std::vector<StoredCondition> conditions;
    const auto take = [&conditions](const Statement& row) {
        conditions.push_back({ConditionId{row.integer(0)}, std::string{row.text(1)}});
        return true;
    };
    return for_each_row(*select, take, m_connection->unreadable_row("condition")).map([&] {
        return std::move(conditions);
    });
}

Result<void>
Store::for_each_movement(const Selection& selection,
                         const std::function<void(const StoredMovement&)>& visit) const {
    auto select = m_connection->database.prepare(std::string{"SELECT "} + movement_columns() +
                                                 " FROM movement" + selected("press_us") +
                                                 " ORDER BY press_us, pointer");
    if (!select) {
        return tl::unexpected{select.error()};
    }
    bind_selection(*select, selection);
    const auto take = [&visit](const Statement& row) {
        const auto movement = read_movement(row);
        if (movement) {
            visit(*movement);
        }
        return movement.has_value();
    };
    return for_each_row(*select, take, m_connection->unreadable_row("movement"));
}

Result<void> Store::for_each_hour(const Selection& selection,
                                  const std::function<void(const StoredHour&)>& visit) const {
    auto select = m_connection->database.prepare(std::string{"SELECT "} + hour_columns() +
                                                 " FROM hour" + selected("start_us") +
                                                 " ORDER BY start_us, pointer, condition, "
                                                 "reference_width_px");
    if (!select) {
        return tl::unexpected{select.error()};
    }
    bind_selection(*select, selection);
    const auto take = [&visit](const Statement& row) {
        const auto read = read_hour(row);
        if (read) {
            visit(read->hour);
        }
        return read.has_value();
    };
    return for_each_row(*select, take, m_connection->unreadable_row("hour"));
}

Result<std::vector<StoredEvent>> Store::events(const Selection& selection) const {
    auto select =
        m_connection->database.prepare("SELECT time_us, kind, pointer, detail FROM event" +
                                       selected("time_us") + " ORDER BY time_us, id");
    if (!select) {
        return tl::unexpected{select.error()};
    }
    bind_selection(*select, selection);
    std::vector<StoredEvent> events;
    const auto take = [&events](const Statement& row) {
        auto event = read_event(row);
        if (event) {
            events.push_back(std::move(*event));
        }
        return event.has_value();
    };
    return for_each_row(*select, take, m_connection->unreadable_row("event")).map([&] {
        return std::move(events);
    });
}

Result<std::optional<UtcTime>> Store::last_hour() const {
    return m_connection->database.integer("SELECT max(start_us) FROM hour")
        .map([](const std::optional<std::int64_t>& start) {
            return start ? std::optional{UtcTime{Micros{*start}}} : std::nullopt;
        });
}

} // namespace sagitta::store
