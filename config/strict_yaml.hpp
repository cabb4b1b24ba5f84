// Strict reading of YAML: every value is asked for by type and range, every key must be known, and
// every refusal names file, line, column, what was read and what is allowed. A file's keys are
// described once, as a table (`Keys`), one line a key.
#pragma once

#include "config/yaml_tree.hpp"
#include "estimator/result.hpp"

#include <cstdint>
#include <functional>
#include <span>
#include <string>
#include <string_view>
#include <utility>
#include <vector>

namespace sagitta::config {

/// The numbers a key allows, ends included.
struct Range {
    double low;
    double high;
    std::string_view unit = ""; ///< e.g. "ms"; empty for a ratio or a count

    /// "20 to 2000 ms".
    [[nodiscard]] std::string text() const;
};

/// One value with its place. A view: the document must outlive it.
class YamlValue {
public:
    explicit YamlValue(const YamlDocument& document);

    /// Where the value stands among the keys, e.g. "pointers[2].cpi", lists counted from 1; empty
    /// for the whole document.
    [[nodiscard]] const std::string& path() const noexcept { return m_path; }
    [[nodiscard]] const std::string& key() const noexcept { return m_node->key; }
    [[nodiscard]] bool is_empty() const noexcept { return m_node->kind == YamlNode::Kind::empty; }

    // Each returns bad_value when the value is of another type or not allowed.
    [[nodiscard]] estimator::Result<double> number(const Range& range) const;
    [[nodiscard]] estimator::Result<std::int64_t> whole_number(const Range& range) const;
    [[nodiscard]] estimator::Result<bool> truth() const;
    /// A scalar of one line without control characters; an empty value is an empty text.
    [[nodiscard]] estimator::Result<std::string> text() const;
    /// The place in `words` of the word that stands here.
    [[nodiscard]] estimator::Result<std::size_t> choice(std::span<const std::string> words) const;
    /// The values of a list; none for an empty value.
    [[nodiscard]] estimator::Result<std::vector<YamlValue>> items() const;
    /// The values of a map, each with its key(); none for an empty value.
    [[nodiscard]] estimator::Result<std::vector<YamlValue>> entries() const;

    /// A refusal of this value: "file:line:column: `path` is `what was read`, but must be
    /// `allowed`".
    [[nodiscard]] tl::unexpected<estimator::Error> must_be(const std::string& allowed) const;
    /// A refusal of this value: "file:line:column: `sentence`".
    [[nodiscard]] tl::unexpected<estimator::Error> refuse(const std::string& sentence) const;
    /// As refuse(), at the place of the value's key.
    [[nodiscard]] tl::unexpected<estimator::Error> refuse_key(const std::string& sentence) const;
    /// A refusal of this map because `key` is not in it.
    [[nodiscard]] tl::unexpected<estimator::Error> lacks(const std::string& key) const;

private:
    YamlValue(const YamlDocument& document, const YamlNode& node, std::string path);

    const YamlDocument* m_document;
    const YamlNode* m_node;
    std::string m_path;
};

/// What people are told of a key.
struct KeyDescription {
    std::string path;    ///< e.g. "movements.rest_ms"
    std::string allowed; ///< e.g. "20 to 2000 ms"
};

/// One key: what it is called, what it allows, and where its value goes.
template <class Target>
struct Key {
    using Read = std::function<estimator::Result<void>(const YamlValue&, Target&)>;

    Key(std::string key_name, std::string what_is_allowed, Read reader,
        std::vector<KeyDescription> keys_inside = {})
        : name{std::move(key_name)}, allowed{std::move(what_is_allowed)}, read{std::move(reader)},
          inside{std::move(keys_inside)} {}

    std::string name;
    std::string allowed;
    Read read;
    std::vector<KeyDescription> inside; ///< of a group or list of maps: the keys below
    bool required = false;
};
template <class Target>
using Keys = std::vector<Key<Target>>;

/// The place in `known` of the key that `value` stands under in `map`.
/// @param described  the known keys with those inside them, for hints
/// @return bad_value naming the nearest valid key, or all when none is near
[[nodiscard]] estimator::Result<std::size_t> find_key(const YamlValue& map, const YamlValue& value,
                                                      std::span<const std::string> known,
                                                      std::span<const KeyDescription> described);

/// Every key of the table, each group followed by the keys inside it.
template <class Target>
[[nodiscard]] std::vector<KeyDescription> describe(const Keys<Target>& keys) {
    std::vector<KeyDescription> all;
    for (const Key<Target>& key : keys) {
        all.push_back({key.name, key.allowed});
        for (const KeyDescription& below : key.inside) {
            all.push_back({key.name + "." + below.path, below.allowed});
        }
    }
    return all;
}

/// Reads a map by its table; a key that is not there leaves the target's value as it is.
/// @return the first refusal in the order of the file; then that of a required key that is missing
template <class Target>
[[nodiscard]] estimator::Result<void> read_keys(const YamlValue& map, const Keys<Target>& keys,
                                                Target& target) {
    const auto entries = map.entries();
    if (!entries) {
        return tl::unexpected{entries.error()};
    }
    std::vector<std::string> names;
    for (const Key<Target>& key : keys) {
        names.push_back(key.name);
    }
    const std::vector<KeyDescription> described = describe(keys);
    std::vector<bool> seen(keys.size(), false);
    for (const YamlValue& value : *entries) {
        const auto found = find_key(map, value, names, described);
        if (!found) {
            return tl::unexpected{found.error()};
        }
        if (auto read = keys[*found].read(value, target); !read) {
            return read;
        }
        seen[*found] = true;
    }
    for (std::size_t i = 0; i < keys.size(); ++i) {
        if (keys[i].required && !seen[i]) {
            return map.lacks(keys[i].name);
        }
    }
    return {};
}

/// Hands a value that was read to `set`, or passes its refusal on.
template <class Value, class Set>
[[nodiscard]] estimator::Result<void> take(estimator::Result<Value> read, const Set& set) {
    if (!read) {
        return tl::unexpected{std::move(read.error())};
    }
    set(std::move(*read));
    return {};
}

template <class Target>
[[nodiscard]] Key<Target> number_key(std::string name, Range range,
                                     std::function<void(Target&, double)> set) {
    return {std::move(name), range.text(), [range, set](const YamlValue& value, Target& target) {
                return take(value.number(range), [&](double number) { set(target, number); });
            }};
}

template <class Target>
[[nodiscard]] Key<Target> whole_number_key(std::string name, Range range,
                                           std::function<void(Target&, std::int64_t)> set) {
    return {std::move(name), range.text(), [range, set](const YamlValue& value, Target& target) {
                return take(value.whole_number(range),
                            [&](std::int64_t number) { set(target, number); });
            }};
}

template <class Target>
[[nodiscard]] Key<Target> truth_key(std::string name, std::function<void(Target&, bool)> set) {
    return {std::move(name), "true or false", [set](const YamlValue& value, Target& target) {
                return take(value.truth(), [&](bool truth) { set(target, truth); });
            }};
}

/// "a, b or c".
[[nodiscard]] std::string either(std::span<const std::string> words);

template <class Target>
[[nodiscard]] Key<Target> choice_key(std::string name, std::vector<std::string> words,
                                     std::function<void(Target&, std::size_t)> set) {
    return {std::move(name), either(words), [words, set](const YamlValue& value, Target& target) {
                return take(value.choice(words), [&](std::size_t word) { set(target, word); });
            }};
}

/// A map of its own with keys for the same target.
template <class Target>
[[nodiscard]] Key<Target> group_key(std::string name, Keys<Target> keys) {
    std::vector<KeyDescription> inside = describe(keys);
    return {std::move(name), "a group of keys",
            [keys = std::move(keys)](const YamlValue& value, Target& target) {
                return read_keys(value, keys, target);
            },
            std::move(inside)};
}

} // namespace sagitta::config
