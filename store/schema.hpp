// The tables of the store and the steps from one version of them to the next.
#pragma once

#include "store/database.hpp"

#include <span>

namespace sagitta::store {

/// "SAGT": marks a SQLite file as ours.
constexpr std::int64_t k_application_id = 0x53414754;

/// Brings the tables from version n to n + 1, inside a transaction.
using Migration = Result<void> (*)(Database& database);

/// Element n makes version n + 1. A new version is one more function at the end.
[[nodiscard]] std::span<const Migration> migrations();
/// The version that this program writes.
[[nodiscard]] std::int64_t current_version();

/// Runs the steps that the file lacks, in one transaction; with none to run it writes nothing.
/// Version 0 is an empty file.
[[nodiscard]] Result<void> migrate(Database& database, std::span<const Migration> steps);

} // namespace sagitta::store
