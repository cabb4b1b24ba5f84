// Finds the word that was probably meant.
#pragma once

#include <cstddef>
#include <optional>
#include <span>
#include <string>
#include <string_view>

namespace sagitta::config {

/// Insertions, deletions, replacements and swaps of neighbours that turn one word into the other.
/// Source: optimal string alignment form of Damerau (1964), from memory.
[[nodiscard]] std::size_t edit_distance(std::string_view a, std::string_view b);

/// The candidate most likely meant by `word`: a candidate that only adds a unit (rest for rest_ms),
/// or the first of the smallest edit distance, if at most a third of the longer word is wrong.
[[nodiscard]] std::optional<std::string> nearest(std::string_view word,
                                                 std::span<const std::string> candidates);

} // namespace sagitta::config
