#include "store/connection.hpp"

#include "store/damage.hpp"
#include "store/schema.hpp"
#include "store/sqlite_error.hpp"

#include <cerrno>
#include <sys/stat.h>
#include <unistd.h>

namespace sagitta::store {

namespace fs = std::filesystem;

namespace {

/// Up to this size reading every page on opening costs a few milliseconds.
constexpr std::uintmax_t k_small_file = 1U << 20U;

bool log_has_writes(const fs::path& file) {
    std::error_code error;
    const auto size = fs::file_size(file.native() + "-wal", error);
    return !error && size > 0;
}

bool is_writable(const fs::path& file) {
    return access(file.c_str(), W_OK) == 0 && access(file.parent_path().c_str(), W_OK) == 0;
}

/// Reading beside a writer needs side files. Where they cannot be made, and no writes wait in
/// them, the file alone is the whole truth and is read without them.
Database::Access reading_access(const fs::path& file) {
    return is_writable(file) || log_has_writes(file) ? Database::Access::read
                                                     : Database::Access::immutable;
}

Depth depth_of(const fs::path& file, const OpenOptions& options) {
    std::error_code error;
    const auto size = fs::file_size(file, error);
    return options.thorough || (!error && size <= k_small_file) ? Depth::whole : Depth::recorded;
}

Result<void> prepare_for_writing(Database& database) {
    const auto objects = database.integer("SELECT count(*) FROM sqlite_schema");
    const auto application = database.integer("PRAGMA application_id");
    if (!objects || !application) {
        return tl::unexpected{!objects ? objects.error() : application.error()};
    }
    // The tables of a new file are made before the log is switched on, so that the marks in the
    // header are in the file itself from the start.
    const bool is_new = *objects == 0 && *application == 0;
    if (is_new || *application == k_application_id) {
        if (auto done = migrate(database, migrations()); !done) {
            return done;
        }
    }
    return {};
}

Result<void> start_log(Database& database) {
    const auto mode = database.text("PRAGMA journal_mode = WAL");
    if (!mode) {
        return tl::unexpected{mode.error()};
    }
    // With a log, NORMAL syncs only when the log is merged. A file system on which the log cannot
    // work keeps the old journal, which is as safe and slower.
    constexpr const char* k_settings = "PRAGMA synchronous = NORMAL; PRAGMA foreign_keys = ON; "
                                       "PRAGMA journal_size_limit = 8388608;";
    return database.run(k_settings);
}

} // namespace

Result<Statement*> Store::Connection::kept(std::optional<Statement>& slot, std::string_view sql) {
    if (!slot) {
        auto statement = database.prepare(sql);
        if (!statement) {
            return tl::unexpected{statement.error()};
        }
        slot = std::move(*statement);
    }
    return &*slot;
}

Result<void> Store::Connection::check_in_place() const {
    struct stat info {};
    if (stat(file.c_str(), &info) == 0 && info.st_dev == device && info.st_ino == inode) {
        return {};
    }
    return fail(ErrorCode::not_found, file.native() + " was moved or deleted while in use, nothing "
                                                      "was written: put it back, or restart to "
                                                      "begin a fresh one");
}

Error Store::Connection::unreadable_row(const char* table) const {
    return damaged_error(file.native(),
                         std::string{"a row of "} + table + " holds impossible values");
}

Result<Database> open_sound_file(const fs::path& file, Mode mode, const OpenOptions& options) {
    const bool writing = mode == Mode::read_write;
    if (writing && !is_writable(file)) {
        return tl::unexpected{system_error("open", file.native(), EACCES)};
    }
    const auto access = writing ? Database::Access::write : reading_access(file);
    auto database = Database::open(file, access, options.busy_timeout);
    if (!database) {
        return database;
    }
    Result<void> ready{};
    if (writing) { // the system lets us write, so only a broken header can keep SQLite from it
        ready = database->is_read_only()
                    ? tl::unexpected{damaged_error(file.native(), "its header is broken")}
                    : prepare_for_writing(*database);
    }
    if (ready) {
        const auto depth = writing            ? depth_of(file, options)
                           : options.thorough ? Depth::whole
                                              : Depth::schema;
        ready = examine(*database, file, depth);
    }
    if (ready && writing) {
        ready = start_log(*database);
    }
    if (!ready) {
        return tl::unexpected{ready.error()};
    }
    return database;
}

} // namespace sagitta::store
