// The time-series file: one SQLite database of movements, hours, pointers, conditions and events.
// One connection, one thread. The on-disk format is described in store/FORMAT.md.
#pragma once

#include "estimator/calibration.hpp"
#include "estimator/hour_summary.hpp"
#include "estimator/movement.hpp"
#include "estimator/pointer.hpp"
#include "estimator/result.hpp"

#include <chrono>
#include <cstdint>
#include <filesystem>
#include <functional>
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace sagitta::store {

using estimator::Result;
using estimator::UtcTime;

enum class PointerId : std::int64_t {};
enum class ConditionId : std::int64_t {};
/// The condition of a file in which nothing was labelled; its label is empty.
constexpr ConditionId k_unlabelled{1};

struct StoredPointer {
    PointerId id;
    std::string name;
    estimator::PointerKind kind;
    estimator::Origin origin;
    std::uint16_t bus, vendor, product;
    estimator::Cpi cpi;
    estimator::CpiSource cpi_source;
    UtcTime first_seen; ///< when the row was made
};

struct StoredCondition {
    ConditionId id;
    std::string label; ///< "" = unlabelled
};

struct StoredMovement {
    UtcTime start; ///< press - scores.movement_time, which is how the file keeps it
    UtcTime press;
    PointerId pointer;
    ConditionId condition;
    estimator::MovementKind kind;
    estimator::Button button;
    estimator::Scores scores;
};

struct StoredHour {
    UtcTime start; ///< a full UTC hour
    PointerId pointer;
    ConditionId condition;
    estimator::HourSummary summary;
};

enum class EventKind : std::uint8_t {
    started,
    stopped,
    paused,
    resumed,
    plugged,
    unplugged,
    lost_reports,
    clock_step,
    slept,
    set_aside,
    replayed,
    settings
};
/// The event's name in stores, exports and JSON, e.g. "lost_reports".
[[nodiscard]] std::string_view to_text(EventKind kind);

struct StoredEvent {
    UtcTime time;
    EventKind kind;
    std::optional<PointerId> pointer;
    std::string detail; ///< e.g. the program's version; never personal
};

/// Rows that are written together or not at all.
struct Batch {
    std::vector<StoredMovement> movements; ///< empty with `detail: hours`
    std::vector<StoredHour> hours;         ///< merged into the rows already there
    std::vector<StoredEvent> events;
    [[nodiscard]] bool empty() const {
        return movements.empty() && hours.empty() && events.empty();
    }
};

struct Opened;

enum class Mode { read_only, read_write };

struct OpenOptions {
    /// How long opening, reading and writing wait for another program's lock.
    std::chrono::milliseconds busy_timeout{3000};
    /// Reads every page to find damage, about 1 s for 2 million movements; without it only what
    /// writing touches is examined. For use after ErrorCode::damaged, and for `check`.
    bool thorough = false;
};

/// Which rows to read: times in [from, to), all pointers unless one is named. The time of a
/// movement is its press, of an hour its start.
struct Selection {
    std::optional<UtcTime> from;
    std::optional<UtcTime> to;
    std::optional<PointerId> pointer;
};

class Store {
public:
    struct Connection; ///< the database behind it, known to this folder only

    /// Opens the file, creating it (mode 0600, parents 0700) when writing; an empty file counts as
    /// new. A damaged file is set aside under a dated name and replaced by a fresh one when
    /// writing, which EventKind::set_aside records. Reading never changes the file.
    /// @param now  stamp for the dated name
    /// @return not_found (reading), no_permission, newer_version, bad_format (a folder, or another
    ///         program's SQLite file), damaged (reading), busy, no_space, io
    [[nodiscard]] static Result<Opened> open(const std::filesystem::path& file, Mode mode,
                                             UtcTime now, const OpenOptions& options = {});
    /// Closes the file and opens it again for writing, as open() does: what to do after
    /// ErrorCode::damaged, thoroughly. Pointers and conditions of a fresh file are numbered anew.
    /// @return where a damaged file was put, when one was found; open()'s errors: the store then
    ///         refuses everything until it is reopened
    [[nodiscard]] Result<std::optional<std::filesystem::path>>
    reopen(UtcTime now, const OpenOptions& options = {});
    Store(Store&&) noexcept;
    Store& operator=(Store&&) noexcept;
    ~Store();

    /// The pointer's row, made when new. Name, bus, vendor, product and origin identify it; a
    /// changed kind, CPI or CPI source is updated in place.
    [[nodiscard]] Result<PointerId> pointer(const estimator::PointerDescription& description,
                                            const estimator::Calibration& calibration, UtcTime now);
    /// The condition's row, made when new.
    [[nodiscard]] Result<ConditionId> condition(const std::string& label);

    /// Writes a batch in one transaction.
    /// @return already_there when a movement of the same pointer and press time exists,
    ///         no_space, busy, no_permission, io, not_found when the file was moved or deleted
    ///         since it was opened, damaged (open it again, thoroughly: that sets it aside);
    ///         nothing of the batch is written then
    [[nodiscard]] Result<void> append(const Batch& batch);
    /// Deletes single movements pressed before `keep_from`; hours stay.
    /// @return rows deleted
    [[nodiscard]] Result<std::uint64_t> prune_movements(UtcTime keep_from);

    [[nodiscard]] Result<std::vector<StoredPointer>> pointers() const;
    [[nodiscard]] Result<std::vector<StoredCondition>> conditions() const;
    /// Visits rows in the order of time, one at a time; memory does not grow with the file. All
    /// rows are of one moment, whatever is written meanwhile.
    /// @return damaged, busy, io; rows visited before are valid
    [[nodiscard]] Result<void>
    for_each_movement(const Selection& selection,
                      const std::function<void(const StoredMovement&)>& visit) const;
    [[nodiscard]] Result<void>
    for_each_hour(const Selection& selection,
                  const std::function<void(const StoredHour&)>& visit) const;
    [[nodiscard]] Result<std::vector<StoredEvent>> events(const Selection& selection) const;
    /// Time of the last hour row's start, if any.
    [[nodiscard]] Result<std::optional<UtcTime>> last_hour() const;

    [[nodiscard]] const std::filesystem::path& file() const;

private:
    explicit Store(std::unique_ptr<Connection> connection);
    std::unique_ptr<Connection> m_connection;
};

struct Opened {
    Store store;
    /// Where a damaged file was put, when one was found.
    std::optional<std::filesystem::path> set_aside;
};

/// $XDG_DATA_HOME/sagitta/sagitta.db, or ~/.local/share/sagitta/sagitta.db when that is unset,
/// empty or not absolute.
[[nodiscard]] std::filesystem::path default_file();

} // namespace sagitta::store
