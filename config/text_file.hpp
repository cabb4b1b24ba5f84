// Reads a small text file whole, and refuses what is no such file.
#pragma once

#include "estimator/result.hpp"

#include <cstddef>
#include <filesystem>
#include <string>
#include <string_view>

namespace sagitta::config {

/// Files above this size are refused: no settings or study file comes near it.
constexpr std::size_t k_max_text_bytes = std::size_t{1} << 20;

/// A place in a text, both counted from 1; columns count characters, not bytes.
struct Position {
    std::size_t line = 1;
    std::size_t column = 1;
};

/// The place of the byte at `offset`. @param offset  <= text.size()
[[nodiscard]] Position position_of(std::string_view text, std::size_t offset) noexcept;

/// "file:line:column".
[[nodiscard]] std::string place(const std::filesystem::path& file, Position position);

/// The file's bytes. Never blocks, whatever the path names.
/// @return not_found, no_permission, bad_format (a folder, pipe, socket or device; larger than
///         k_max_text_bytes), io
[[nodiscard]] estimator::Result<std::string> read_text_file(const std::filesystem::path& file);

/// Nothing when `text` is UTF-8 without control characters other than tab and line ends.
/// @return bad_format with the place of the first wrong byte
[[nodiscard]] estimator::Result<void> check_text(std::string_view text,
                                                 const std::filesystem::path& file);

} // namespace sagitta::config
