#include "config/settings.hpp"

#include "config/settings_keys.hpp"
#include "config/strict_yaml.hpp"

#include <array>
#include <cstdlib>
#include <string_view>
#include <system_error>

namespace sagitta::config {
namespace {

using estimator::Result;

/// Whether `text` has the form of `pattern`, in which * stands for any text.
bool matches(std::string_view pattern, std::string_view text) noexcept {
    std::size_t p = 0;
    std::size_t t = 0;
    std::size_t star = std::string_view::npos;
    std::size_t resume = 0; // where the text after the last star is tried again
    while (t < text.size()) {
        if (p < pattern.size() && pattern[p] == '*') {
            star = p++;
            resume = t;
        } else if (p < pattern.size() && pattern[p] == text[t]) {
            ++p;
            ++t;
        } else if (star != std::string_view::npos) {
            p = star + 1;
            t = ++resume;
        } else {
            return false;
        }
    }
    return pattern.find_first_not_of('*', p) == std::string_view::npos;
}

/// An absolute path from the environment; anything else counts as unset.
/// Source: XDG Base Directory Specification: "All paths set in these environment variables must be
/// absolute. ... consider the path invalid and ignore it."
std::optional<std::filesystem::path> folder_from(const char* variable) {
    const char* value = std::getenv(variable);
    if (value == nullptr || value[0] != '/') {
        return std::nullopt;
    }
    return std::filesystem::path{value};
}

/// A file that cannot be looked at still counts, so that reading it tells why.
bool may_exist(const std::filesystem::path& file) {
    std::error_code error;
    return std::filesystem::symlink_status(file, error).type() !=
           std::filesystem::file_type::not_found;
}

} // namespace

Result<Settings> parse_settings(std::string_view text, const std::filesystem::path& file) {
    const auto document = parse_yaml(text, file);
    if (!document) {
        return tl::unexpected{document.error()};
    }
    Settings settings;
    const Keys<Settings> keys = settings_keys(file.parent_path());
    if (auto read = read_keys(YamlValue{*document}, keys, settings); !read) {
        return tl::unexpected{std::move(read.error())};
    }
    return settings;
}

Result<Settings> read_settings(const std::filesystem::path& file) {
    const auto text = read_text_file(file);
    if (!text) {
        return tl::unexpected{text.error()};
    }
    return parse_settings(*text, file);
}

std::optional<std::filesystem::path> find_settings_file() {
    auto home = folder_from("XDG_CONFIG_HOME");
    if (!home) {
        if (const auto user = folder_from("HOME")) {
            home = *user / ".config";
        }
    }
    if (home && may_exist(*home / "sagitta" / "sagitta.yaml")) {
        return *home / "sagitta" / "sagitta.yaml";
    }
    const std::filesystem::path system_wide{"/etc/sagitta/sagitta.yaml"};
    return may_exist(system_wide) ? std::optional{system_wide} : std::nullopt;
}

const PointerSettings* settings_for(const Settings& settings, const std::string& pointer_name) {
    for (const PointerSettings& pointer : settings.pointers) {
        if (matches(pointer.name, pointer_name)) {
            return &pointer;
        }
    }
    return nullptr;
}

} // namespace sagitta::config
