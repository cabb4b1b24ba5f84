#include "store/sqlite_error.hpp"

#include <cerrno>
#include <cstring>
#include <sqlite3.h>
#include <sys/stat.h>

namespace sagitta::store {

using estimator::Error;
using estimator::ErrorCode;

namespace {

std::string file_of(sqlite3* database) {
    const char* const name = database ? sqlite3_db_filename(database, "main") : nullptr;
    return name && *name ? name : "the store";
}

/// Closing would merge the log into a file known to be broken.
void keep_log(sqlite3* database, const std::string& file) {
    struct stat log {};
    if (database && stat((file + "-wal").c_str(), &log) == 0 && log.st_size > 0) {
        sqlite3_db_config(database, SQLITE_DBCONFIG_NO_CKPT_ON_CLOSE, 1, nullptr);
    }
}

int last_errno_of(sqlite3_file* file) {
    int number = 0;
    if (file && file->pMethods) {
        file->pMethods->xFileControl(file, SQLITE_FCNTL_LAST_ERRNO, &number);
    }
    return number;
}

/// errno of the failed call. SQLite passes it on for opening only; for writing it stays with the
/// file that was written, the log or the journal before the file itself.
int system_number(sqlite3* database) {
    if (!database) {
        return 0;
    }
    int number = sqlite3_system_errno(database);
    for (const int which : {SQLITE_FCNTL_JOURNAL_POINTER, SQLITE_FCNTL_FILE_POINTER}) {
        sqlite3_file* file = nullptr;
        if (number == 0 && sqlite3_file_control(database, "main", which, &file) == SQLITE_OK) {
            number = last_errno_of(file);
        }
    }
    return number;
}

bool is_lack_of_space(int number) {
    return number == ENOSPC || number == EDQUOT || number == EFBIG;
}

bool is_lack_of_permission(int number) {
    return number == EACCES || number == EPERM || number == EROFS;
}

Error no_space(const std::string& file) {
    return {ErrorCode::no_space, file + " could not be written, nothing was changed: the disk, "
                                        "the quota or a size limit is full; free some space and "
                                        "try again"};
}

Error no_permission(const std::string& file) {
    return {ErrorCode::no_permission,
            file + " may not be opened or written by this user: change the owner or the mode of "
                   "the file and its folder, or name another file"};
}

} // namespace

Error damaged_error(const std::string& file, const std::string& why) {
    return {ErrorCode::damaged,
            file + " is damaged (" + why +
                "): restart sagittad, which sets it aside and starts a fresh file, or put a copy "
                "in its place"};
}

Error system_error(const std::string& doing, const std::string& file, int number) {
    if (is_lack_of_space(number)) {
        return no_space(file);
    }
    if (is_lack_of_permission(number)) {
        return no_permission(file);
    }
    const auto code = number == ENOENT ? ErrorCode::not_found : ErrorCode::io;
    return {code, "could not " + doing + " " + file + ": " + std::strerror(number)};
}

Error error_of(sqlite3* database, int code) {
    const std::string file = file_of(database);
    const std::string reason = database ? sqlite3_errmsg(database) : sqlite3_errstr(code);
    const int number = system_number(database);
    switch (code & 0xff) {
    case SQLITE_BUSY:
    case SQLITE_LOCKED:
        return {ErrorCode::busy, file + " is locked by another program, nothing was changed: try "
                                        "again when that has finished"};
    case SQLITE_FULL:
        return no_space(file);
    case SQLITE_READONLY:
    case SQLITE_PERM:
    case SQLITE_AUTH:
        return no_permission(file);
    case SQLITE_CORRUPT:
    case SQLITE_NOTADB:
    case SQLITE_FORMAT:
    case SQLITE_SCHEMA:
        keep_log(database, file);
        return damaged_error(file, reason);
    case SQLITE_CANTOPEN:
    case SQLITE_IOERR:
        if (code == SQLITE_IOERR_CORRUPTFS) {
            return damaged_error(file, reason);
        }
        if (is_lack_of_space(number)) {
            return no_space(file);
        }
        if (is_lack_of_permission(number)) {
            return no_permission(file);
        }
        return {ErrorCode::io, "could not read or write " + file + ": " + reason +
                                   (number != 0 ? std::string{", "} + std::strerror(number) : "")};
    default:
        return {ErrorCode::io, "could not read or write " + file + ": " + reason};
    }
}

} // namespace sagitta::store
