// The keys of sagitta.yaml, one line each.
#pragma once

#include "config/settings.hpp"
#include "config/strict_yaml.hpp"

#include <filesystem>
#include <vector>

namespace sagitta::config {

/// @param folder  where the relative file names of gain tables are looked up
[[nodiscard]] Keys<Settings> settings_keys(const std::filesystem::path& folder);

/// Every key with what it allows, e.g. {"movements.rest_ms", "20 to 2000 ms"}; groups and the
/// keys of list entries included.
[[nodiscard]] std::vector<KeyDescription> describe_settings();

} // namespace sagitta::config
