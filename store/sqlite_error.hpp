// SQLite's result codes in the house's terms.
#pragma once

#include "estimator/result.hpp"

#include <string>

struct sqlite3;

namespace sagitta::store {

/// The error behind a failed call. A damaged file's write-ahead log is kept from being merged
/// into it, so that nothing more is lost.
/// @param code  SQLite's extended result code
[[nodiscard]] estimator::Error error_of(sqlite3* database, int code);

/// The sentence for a file that is broken. @param why  what was found
[[nodiscard]] estimator::Error damaged_error(const std::string& file, const std::string& why);

/// The error behind a failed system call on `file`. @param number  errno
[[nodiscard]] estimator::Error system_error(const std::string& doing, const std::string& file,
                                            int number);

} // namespace sagitta::store
