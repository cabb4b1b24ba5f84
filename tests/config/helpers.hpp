// What the tests of the config share.
#pragma once

#include "config/settings.hpp"

#include <cstdlib>
#include <doctest/doctest.h>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <optional>
#include <string>
#include <string_view>
#include <system_error>

namespace sagitta::config {

/// A folder that exists as long as the test.
class TempFolder {
public:
    TempFolder() {
        std::string name = (std::filesystem::temp_directory_path() / "sagitta-XXXXXX").string();
        REQUIRE(::mkdtemp(name.data()) != nullptr);
        m_path = name;
    }
    TempFolder(const TempFolder&) = delete;
    TempFolder& operator=(const TempFolder&) = delete;
    ~TempFolder() {
        std::error_code ignored;
        std::filesystem::remove_all(m_path, ignored);
    }

    [[nodiscard]] const std::filesystem::path& path() const { return m_path; }
    [[nodiscard]] std::filesystem::path write(const std::string& name,
                                              std::string_view content) const {
        const std::filesystem::path file = m_path / name;
        std::filesystem::create_directories(file.parent_path());
        std::ofstream{file, std::ios::binary} << content;
        return file;
    }

private:
    std::filesystem::path m_path;
};

/// An environment variable for the length of a test; nullptr: not set.
class ScopedVariable {
public:
    ScopedVariable(const char* name, const char* value) : m_name{name} {
        if (const char* before = std::getenv(name)) {
            m_before = before;
        }
        set(value);
    }
    ScopedVariable(const ScopedVariable&) = delete;
    ScopedVariable& operator=(const ScopedVariable&) = delete;
    ~ScopedVariable() { set(m_before ? m_before->c_str() : nullptr); }

private:
    void set(const char* value) const {
        value == nullptr ? ::unsetenv(m_name) : ::setenv(m_name, value, 1);
    }
    const char* m_name;
    std::optional<std::string> m_before;
};

inline std::string slurp(const std::filesystem::path& file) {
    std::ifstream stream{file, std::ios::binary};
    REQUIRE(stream.good());
    return {std::istreambuf_iterator<char>{stream}, {}};
}

/// The settings in `text`, which must be right.
inline Settings settings_in(std::string_view text) {
    auto settings = parse_settings(text, "sagitta.yaml");
    REQUIRE_MESSAGE(settings.has_value(), settings.error().message);
    return *settings;
}

/// What the reader says of `text`, which must be wrong.
inline estimator::Error refusal_of(std::string_view text) {
    const auto settings = parse_settings(text, "sagitta.yaml");
    REQUIRE_FALSE(settings.has_value());
    return settings.error();
}

inline std::string message_of(std::string_view text) {
    return refusal_of(text).message;
}

} // namespace sagitta::config
