// The settings of both programs, and the reader that refuses what it does not know.
#pragma once

#include "estimator/calibration.hpp"
#include "estimator/result.hpp"
#include "estimator/rules.hpp"

#include <chrono>
#include <filesystem>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace sagitta::config {

/// What the person says of one pointer. The first entry whose `name` matches counts.
struct PointerSettings {
    std::string name; ///< the pointer's name; * stands for any text
    std::optional<estimator::Cpi> cpi;
    estimator::Gain gain = estimator::Gain::unity();
    /// The desktop brings faster pointers down to this CPI before its gain table counts; nothing:
    /// the table takes the pointer's own counts.
    std::optional<estimator::Cpi> gain_normalised_to;
    bool ignore = false; ///< never open it
};

enum class Detail { movements, hours };

struct Settings {
    estimator::Rules rules;
    std::vector<PointerSettings> pointers;
    std::optional<std::filesystem::path> store_file; ///< nothing: the default place
    Detail detail = Detail::movements;
    std::chrono::days keep_movements{400};
    std::chrono::seconds batch_time{60};
    std::size_t batch_movements = 256;
    estimator::Pixels standard_distance = estimator::Pixels::of(200.0); ///< of `week`
    double confidence = 0.95;
    std::string time_zone; ///< IANA name; empty: the system's
    std::string log_level = "info";
};

/// Reads a config file. Every error names file, line, column, and the nearest valid key.
/// @return not_found, no_permission, bad_format (not YAML, not UTF-8, a folder, nested too deep),
///         bad_value (unknown key, wrong type, out of range), io
[[nodiscard]] estimator::Result<Settings> read_settings(const std::filesystem::path& file);

/// The same for content already in memory.
/// @param file  named in messages; relative file names of gain tables start at its folder
[[nodiscard]] estimator::Result<Settings> parse_settings(std::string_view text,
                                                         const std::filesystem::path& file);

/// The file to read: $XDG_CONFIG_HOME/sagitta/sagitta.yaml (~/.config when that is not
/// set), else /etc/sagitta/sagitta.yaml;
/// nothing when none exists, and the defaults hold.
[[nodiscard]] std::optional<std::filesystem::path> find_settings_file();

/// The entry for a pointer of this name, if any.
[[nodiscard]] const PointerSettings* settings_for(const Settings& settings,
                                                  const std::string& pointer_name);

} // namespace sagitta::config
