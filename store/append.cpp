// Writing: batches, pointers, conditions and retention.
#include "store/connection.hpp"
#include "store/hour_row.hpp"
#include "store/movement_row.hpp"

namespace sagitta::store {

namespace {

std::int64_t micros_of(UtcTime time) {
    return time.time_since_epoch().count();
}

Result<void> step_once(Statement& statement) {
    return statement.step().map([](bool) {});
}

/// Runs a step inside a transaction.
template <class Step>
auto in_transaction(Database& database, Step&& step) -> decltype(step()) {
    auto transaction = Transaction::begin(database);
    if (!transaction) {
        return tl::unexpected{transaction.error()};
    }
    auto result = step();
    if (!result) {
        return result;
    }
    if (auto committed = transaction->commit(); !committed) {
        return tl::unexpected{committed.error()};
    }
    return result;
}

} // namespace

/// The parts of a batch, each inside the batch's transaction.
struct BatchWriter {
    Store::Connection& connection;

    Result<void> movements(const std::vector<StoredMovement>& movements) const;
    Result<void> hours(const std::vector<StoredHour>& hours) const;
    Result<void> events(const std::vector<StoredEvent>& events) const;

private:
    Result<std::optional<HourRow>> find(const StoredHour& hour) const;
};

Result<void> BatchWriter::movements(const std::vector<StoredMovement>& movements) const {
    const auto insert = connection.kept(connection.insert_movement, insert_movement_sql());
    if (!insert) {
        return tl::unexpected{insert.error()};
    }
    for (const auto& movement : movements) {
        const ScopedReset after{**insert};
        bind_movement(**insert, movement);
        auto stored = step_once(**insert);
        if (!stored && stored.error().code == ErrorCode::already_there) {
            return fail(ErrorCode::already_there,
                        connection.file.native() + " already holds a movement of this pointer with "
                                                   "the same press time, nothing was written: was "
                                                   "this recording stored before?");
        }
        if (!stored) {
            return stored;
        }
    }
    return {};
}

Result<std::optional<HourRow>> BatchWriter::find(const StoredHour& hour) const {
    static const std::string sql = std::string{"SELECT "} + hour_columns() +
                                   " FROM hour WHERE start_us = ? AND pointer = ? AND "
                                   "condition = ? AND reference_width_px = ?";
    const auto select = connection.kept(connection.find_hour, sql);
    if (!select) {
        return tl::unexpected{select.error()};
    }
    const ScopedReset after{**select};
    (*select)->bind_integer(micros_of(hour.start));
    (*select)->bind_integer(static_cast<std::int64_t>(hour.pointer));
    (*select)->bind_integer(static_cast<std::int64_t>(hour.condition));
    (*select)->bind_real(hour.summary.reference_width.value());
    const auto found = (*select)->step();
    if (!found) {
        return tl::unexpected{found.error()};
    }
    if (!*found) {
        return std::optional<HourRow>{};
    }
    auto row = read_hour(**select);
    if (!row) {
        return tl::unexpected{connection.unreadable_row("hour")};
    }
    return row;
}

Result<void> BatchWriter::hours(const std::vector<StoredHour>& hours) const {
    const auto replace = connection.kept(connection.replace_hour, replace_hour_sql());
    if (!replace) {
        return tl::unexpected{replace.error()};
    }
    for (const auto& hour : hours) {
        auto there = find(hour);
        if (!there) {
            return tl::unexpected{there.error()};
        }
        const ScopedReset after{**replace};
        if (*there) {
            auto& row = **there;
            row.hour.summary.merge(hour.summary);
            bind_hour(**replace, row.row_id, row.hour);
        } else {
            bind_hour(**replace, std::nullopt, hour);
        }
        if (auto stored = step_once(**replace); !stored) {
            return stored;
        }
    }
    return {};
}

Result<void> BatchWriter::events(const std::vector<StoredEvent>& events) const {
    const auto insert =
        connection.kept(connection.insert_event,
                        "INSERT INTO event (time_us, kind, pointer, detail) VALUES (?, ?, ?, ?)");
    if (!insert) {
        return tl::unexpected{insert.error()};
    }
    for (const auto& event : events) {
        const ScopedReset after{**insert};
        (*insert)->bind_integer(micros_of(event.time));
        (*insert)->bind_text(to_text(event.kind));
        if (event.pointer) {
            (*insert)->bind_integer(static_cast<std::int64_t>(*event.pointer));
        } else {
            (*insert)->bind_null();
        }
        (*insert)->bind_text(event.detail);
        if (auto stored = step_once(**insert); !stored) {
            return stored;
        }
    }
    return {};
}

Result<void> Store::append(const Batch& batch) {
    if (batch.empty()) {
        return {};
    }
    if (auto in_place = m_connection->check_in_place(); !in_place) {
        return in_place;
    }
    const BatchWriter writer{*m_connection};
    return in_transaction(m_connection->database, [&]() -> Result<void> {
        return writer.movements(batch.movements)
            .and_then([&] { return writer.hours(batch.hours); })
            .and_then([&] { return writer.events(batch.events); });
    });
}

namespace {

void bind_identity(Statement& statement, const estimator::PointerDescription& description) {
    statement.bind_text(description.name);
    statement.bind_integer(std::int64_t{description.bus});
    statement.bind_integer(std::int64_t{description.vendor});
    statement.bind_integer(std::int64_t{description.product});
    statement.bind_text(to_text(description.origin));
}

void bind_state(Statement& statement, const estimator::PointerDescription& description,
                const estimator::Calibration& calibration) {
    statement.bind_text(to_text(description.kind));
    statement.bind_real(calibration.cpi.value());
    statement.bind_text(to_text(calibration.cpi_source));
}

} // namespace

Result<PointerId> Store::pointer(const estimator::PointerDescription& description,
                                 const estimator::Calibration& calibration, UtcTime now) {
    auto& database = m_connection->database;
    return in_transaction(database, [&]() -> Result<PointerId> {
        auto insert = database.prepare(
            "INSERT INTO pointer (name, bus, vendor, product, origin, kind, cpi, cpi_source, "
            "first_seen_us) VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9) "
            "ON CONFLICT (name, bus, vendor, product, origin) DO UPDATE SET kind = ?6, cpi = ?7, "
            "cpi_source = ?8 RETURNING id");
        if (!insert) {
            return tl::unexpected{insert.error()};
        }
        bind_identity(*insert, description);
        bind_state(*insert, description, calibration);
        insert->bind_integer(micros_of(now));
        const auto row = insert->step();
        if (!row) {
            return tl::unexpected{row.error()};
        }
        return PointerId{insert->integer(0)};
    });
}

Result<ConditionId> Store::condition(const std::string& label) {
    auto& database = m_connection->database;
    return in_transaction(database, [&]() -> Result<ConditionId> {
        auto insert = database.prepare("INSERT INTO condition (label) VALUES (?) "
                                       "ON CONFLICT (label) DO UPDATE SET label = label "
                                       "RETURNING id");
        if (!insert) {
            return tl::unexpected{insert.error()};
        }
        insert->bind_text(label);
        const auto row = insert->step();
        if (!row) {
            return tl::unexpected{row.error()};
        }
        return ConditionId{insert->integer(0)};
    });
}

Result<std::uint64_t> Store::prune_movements(UtcTime keep_from) {
    auto& database = m_connection->database;
    return in_transaction(database, [&]() -> Result<std::uint64_t> {
        auto remove = database.prepare("DELETE FROM movement WHERE press_us < ?");
        if (!remove) {
            return tl::unexpected{remove.error()};
        }
        remove->bind_integer(micros_of(keep_from));
        return remove->step().map(
            [&](bool) { return static_cast<std::uint64_t>(database.changed_rows()); });
    });
}

} // namespace sagitta::store
