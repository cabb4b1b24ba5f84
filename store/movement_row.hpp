// A movement as a row of scaled integers. The scales are part of the on-disk format.
#pragma once

#include "store/database.hpp"
#include "store/store.hpp"

#include <optional>
#include <string>

namespace sagitta::store {

/// The columns in the order in which they are bound and read, separated by commas.
[[nodiscard]] const char* movement_columns();
/// The statement that stores a row.
[[nodiscard]] const std::string& insert_movement_sql();

/// Binds all columns. Numbers are rounded to the nearest step of their scale; a value that is not
/// finite, or beyond 64 bits, becomes NULL. `start` follows from press and movement time.
void bind_movement(Statement& statement, const StoredMovement& movement);
/// @return nothing when a column holds what no writer of this version writes
[[nodiscard]] std::optional<StoredMovement> read_movement(const Statement& row);

} // namespace sagitta::store
