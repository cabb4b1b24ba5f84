// Reads the gain of a pointer: a flat factor, or a table given in place or in a file of its own.
#pragma once

#include "config/settings.hpp"
#include "config/strict_yaml.hpp"

#include <filesystem>

namespace sagitta::config {

/// Reads the map under a pointer's `gain` key into `pointer`.
/// @param folder  where a table's relative file name is looked up
/// @return bad_value, also for a table that is empty, negative or not increasing in speed; the
///         errors of read_gain_table
[[nodiscard]] estimator::Result<void>
read_gain(const YamlValue& value, const std::filesystem::path& folder, PointerSettings& pointer);

/// A gain table's file: `normalised_to_cpi` (optional) and `points`.
struct GainTable {
    estimator::Gain gain;
    std::optional<estimator::Cpi> normalised_to;
};
/// @return the errors of read_settings
[[nodiscard]] estimator::Result<GainTable> read_gain_table(const std::filesystem::path& file);

/// The keys of `gain` for people and tests.
[[nodiscard]] std::vector<KeyDescription> describe_gain();

} // namespace sagitta::config
