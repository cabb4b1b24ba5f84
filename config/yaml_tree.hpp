// A YAML document as a plain tree in which every value knows its place. Only what settings need is
// allowed: one document of maps, lists and scalars; no anchors, aliases or tags; no key twice.
#pragma once

#include "config/text_file.hpp"
#include "estimator/result.hpp"

#include <filesystem>
#include <string>
#include <string_view>
#include <vector>

namespace sagitta::config {

constexpr std::size_t k_max_yaml_depth = 16;
constexpr std::size_t k_max_yaml_nodes = 50'000;

struct YamlNode {
    enum class Kind { empty, scalar, list, map };

    Kind kind = Kind::empty;
    std::size_t offset = 0; ///< of the value in the text; of the key when the value is empty
    std::string key;        ///< the value's key in the map above; empty in a list
    std::size_t key_offset = 0;
    std::string text;    ///< of a scalar
    bool quoted = false; ///< the scalar was written in quotes or as a block
    std::vector<YamlNode> children;
};

struct YamlDocument {
    std::filesystem::path file; ///< for messages
    std::string text;
    YamlNode root;
};

/// @param text  the file's content; empty or only comments gives an empty root
/// @param file  for messages only
/// @return bad_format: not text, broken YAML, a second document, deeper than k_max_yaml_depth, more
///         than k_max_yaml_nodes values, an anchor, alias or tag, a key twice
[[nodiscard]] estimator::Result<YamlDocument> parse_yaml(std::string_view text,
                                                         const std::filesystem::path& file);

} // namespace sagitta::config
