// An hour as a row: plain columns for counts, sums and moments, bytes for histograms and sectors.
#pragma once

#include "store/database.hpp"
#include "store/store.hpp"

#include <optional>
#include <string>

namespace sagitta::store {

/// A row and its key in the file.
struct HourRow {
    std::int64_t row_id;
    StoredHour hour;
};

/// The columns in the order in which they are bound and read, separated by commas; the first is
/// the row's key.
[[nodiscard]] const char* hour_columns();
/// The statement that stores a row, in place of the one with the same key.
[[nodiscard]] const std::string& replace_hour_sql();

/// Binds all columns. @param row_id  none for a new row
void bind_hour(Statement& statement, std::optional<std::int64_t> row_id, const StoredHour& hour);
/// @return nothing when a column holds what no writer of this version writes
[[nodiscard]] std::optional<HourRow> read_hour(const Statement& row);

} // namespace sagitta::store
