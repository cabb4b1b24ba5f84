#include "store/schema.hpp"

#include "estimator/movement.hpp"

#include <array>

namespace sagitta::store {

namespace {

// A version's text never changes once it was released; see store/FORMAT.md for the meaning.
constexpr const char* k_version_1 = R"sql(
CREATE TABLE pointer (
    id            INTEGER PRIMARY KEY,
    name          TEXT NOT NULL,
    bus           INTEGER NOT NULL,
    vendor        INTEGER NOT NULL,
    product       INTEGER NOT NULL,
    origin        TEXT NOT NULL,
    kind          TEXT NOT NULL,
    cpi           REAL,
    cpi_source    TEXT NOT NULL,
    first_seen_us INTEGER NOT NULL,
    UNIQUE (name, bus, vendor, product, origin)
) STRICT;

CREATE TABLE condition (
    id    INTEGER PRIMARY KEY,
    label TEXT NOT NULL UNIQUE
) STRICT;
INSERT INTO condition (id, label) VALUES (1, '');

CREATE TABLE movement (
    press_us                INTEGER NOT NULL,
    pointer                 INTEGER NOT NULL REFERENCES pointer (id),
    condition               INTEGER NOT NULL REFERENCES condition (id),
    kind                    INTEGER NOT NULL,
    button                  INTEGER NOT NULL,
    distance_centipx        INTEGER,
    direction_decideg       INTEGER,
    movement_time_us        INTEGER NOT NULL,
    dwell_100us             INTEGER NOT NULL,
    path_centipx            INTEGER,
    error_centipx           INTEGER,
    offset_centipx          INTEGER,
    variability_centipx     INTEGER,
    max_deviation_centipx   INTEGER,
    axis_crossings          INTEGER NOT NULL,
    direction_changes       INTEGER NOT NULL,
    orthogonal_changes      INTEGER NOT NULL,
    peak_speed_decimm_s     INTEGER,
    time_to_peak_100us      INTEGER NOT NULL,
    submovements            INTEGER NOT NULL,
    primary_fraction_e4     INTEGER,
    primary_lateral_centipx INTEGER,
    initial_angle_decideg   INTEGER,
    smoothness_sparc_e3     INTEGER,
    smoothness_ldlj_e3      INTEGER,
    hand_travel_centimm     INTEGER,
    reports                 INTEGER NOT NULL,
    flags                   INTEGER NOT NULL,
    PRIMARY KEY (press_us, pointer)
) WITHOUT ROWID, STRICT;

CREATE TABLE hour (
    id                              INTEGER PRIMARY KEY,
    start_us                        INTEGER NOT NULL,
    pointer                         INTEGER NOT NULL REFERENCES pointer (id),
    condition                       INTEGER NOT NULL REFERENCES condition (id),
    reference_width_px              REAL NOT NULL,
    scored_click                    INTEGER NOT NULL,
    scored_drag                     INTEGER NOT NULL,
    repeat_press                    INTEGER NOT NULL,
    other_button_down               INTEGER NOT NULL,
    no_motion                       INTEGER NOT NULL,
    too_short                       INTEGER NOT NULL,
    too_slow                        INTEGER NOT NULL,
    long_dwell                      INTEGER NOT NULL,
    wandering                       INTEGER NOT NULL,
    lost_reports                    INTEGER NOT NULL,
    interrupted                     INTEGER NOT NULL,
    no_press                        INTEGER NOT NULL,
    presses                         INTEGER NOT NULL,
    wheel_120ths                    INTEGER NOT NULL,
    motion_reports                  INTEGER NOT NULL,
    active_us                       INTEGER NOT NULL,
    hand_travel_mm                  REAL,
    clicks                          INTEGER NOT NULL,
    clicks_cpi_assumed              INTEGER NOT NULL,
    movement_time_us                INTEGER NOT NULL,
    difficulty_half_width_bits      REAL,
    difficulty_bits                 REAL,
    difficulty_double_width_bits    REAL,
    distance_time_n                 INTEGER NOT NULL,
    distance_time_mean_ln_px        REAL,
    distance_time_mean_ln_s         REAL,
    distance_time_m2_ln_px          REAL,
    distance_time_m2_ln_s           REAL,
    distance_time_m_product         REAL,
    distance_error_n                INTEGER NOT NULL,
    distance_error_mean_ln_distance REAL,
    distance_error_mean_ln_error    REAL,
    distance_error_m2_ln_distance   REAL,
    distance_error_m2_ln_error      REAL,
    distance_error_m_product        REAL,
    ln_path_ratio_n                 INTEGER NOT NULL,
    ln_path_ratio_mean              REAL,
    ln_path_ratio_m2                REAL,
    direction_changes_n             INTEGER NOT NULL,
    direction_changes_mean          REAL,
    direction_changes_m2            REAL,
    submovements_n                  INTEGER NOT NULL,
    submovements_mean               REAL,
    submovements_m2                 REAL,
    peak_speed_n                    INTEGER NOT NULL,
    peak_speed_mean_mm_s            REAL,
    peak_speed_m2                   REAL,
    distance_px_histogram           BLOB NOT NULL,
    movement_time_ms_histogram      BLOB NOT NULL,
    error_centipx_histogram         BLOB NOT NULL,
    sectors                         BLOB NOT NULL,
    UNIQUE (start_us, pointer, condition, reference_width_px)
) STRICT;

CREATE TABLE event (
    id      INTEGER PRIMARY KEY,
    time_us INTEGER NOT NULL,
    kind    TEXT NOT NULL,
    pointer INTEGER REFERENCES pointer (id),
    detail  TEXT NOT NULL
) STRICT;
CREATE INDEX event_by_time ON event (time_us);
)sql";
static_assert(estimator::k_outcomes == 12, "a new outcome needs a migration that adds its column");

Result<void> create_version_1(Database& database) {
    return database.run(k_version_1);
}

constexpr std::array<Migration, 1> k_migrations{create_version_1};

} // namespace

std::span<const Migration> migrations() {
    return k_migrations;
}

std::int64_t current_version() {
    return static_cast<std::int64_t>(k_migrations.size());
}

Result<void> migrate(Database& database, std::span<const Migration> steps) {
    const auto wanted = static_cast<std::int64_t>(steps.size());
    auto version = database.integer("PRAGMA user_version");
    if (!version || version->value_or(0) == wanted) {
        return version.map([](const auto&) {});
    }
    auto transaction = Transaction::begin(database);
    if (!transaction) {
        return tl::unexpected{transaction.error()};
    }
    version = database.integer("PRAGMA user_version"); // again, now that nobody else can change it
    if (!version) {
        return tl::unexpected{version.error()};
    }
    for (auto next = version->value_or(0); next < wanted; ++next) {
        if (auto done = steps[static_cast<std::size_t>(next)](database); !done) {
            return done;
        }
    }
    const std::string marks = "PRAGMA application_id = " + std::to_string(k_application_id) +
                              "; PRAGMA user_version = " + std::to_string(wanted);
    if (auto done = database.run(marks.c_str()); !done) {
        return done;
    }
    return transaction->commit();
}

} // namespace sagitta::store
