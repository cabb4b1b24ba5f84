// Finding out whether a file is a sound store, and putting a broken one out of the way.
#pragma once

#include "store/database.hpp"
#include "store/store.hpp"

namespace sagitta::store {

/// What the file looks like before SQLite touches it.
enum class FileState { missing, empty, plausible };

/// Looks at the file's kind, size and header only. Does not change it.
/// @return damaged when the header is broken or pages are missing; bad_format when it is not a
///         regular file or another program's SQLite file; newer_version; no_permission; io
[[nodiscard]] Result<FileState> inspect(const std::filesystem::path& file);

/// How much of a file is read to find damage.
enum class Depth {
    schema,   ///< marks, version and tables: a few pages
    recorded, ///< also the small tables and the end of the movements: what writing touches
    whole     ///< every page
};

/// @param database  with all migrations done
/// @return damaged, or the error that kept from looking
[[nodiscard]] Result<void> examine(Database& database, const std::filesystem::path& file,
                                   Depth depth);

/// Renames the file and its side files to FILE.damaged-<UTC time>, with a number behind when that
/// is taken. Nobody may have the file open.
/// @return the new name; no_permission, io
[[nodiscard]] Result<std::filesystem::path> set_aside(const std::filesystem::path& file,
                                                      UtcTime now);

} // namespace sagitta::store
