#include "config/strict_yaml.hpp"

#include "config/nearest.hpp"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <cstdio>
#include <optional>

namespace sagitta::config {
namespace {

using estimator::Error;
using estimator::ErrorCode;
using estimator::fail;
using estimator::Result;

constexpr std::size_t k_longest_quote = 40; // bytes of the file that a message repeats

/// For the ends of ranges, which are short numbers.
std::string shortest(double number) {
    std::array<char, 32> text{};
    const auto written =
        std::to_chars(text.data(), text.data() + text.size(), number, std::chars_format::fixed);
    return {text.data(), written.ptr};
}

/// Length of the control character at `i` (C0, DEL, or C1 in UTF-8), 0 when there is none.
std::size_t control_length(std::string_view text, std::size_t i) {
    const auto byte = [&](std::size_t at) {
        return at < text.size() ? static_cast<unsigned char>(text[at]) : 0xFFU;
    };
    if (byte(i) < 0x20 || byte(i) == 0x7F) {
        return 1;
    }
    return byte(i) == 0xC2 && byte(i + 1) < 0xA0 ? 2 : 0;
}

bool has_control(std::string_view text) {
    for (std::size_t i = 0; i < text.size(); ++i) {
        if (control_length(text, i) > 0) {
            return true;
        }
    }
    return false;
}

/// Text from a file for a message: in quotes, cut when long, controls shown as \xNN, so that it
/// can neither break the line nor drive a terminal.
std::string in_quotes(std::string_view text) {
    std::string shown = "'";
    for (std::size_t i = 0; i < text.size();) {
        const bool starts_character = (static_cast<unsigned char>(text[i]) & 0xC0) != 0x80;
        if (i >= k_longest_quote && starts_character) {
            shown += "...";
            break;
        }
        const std::size_t length = control_length(text, i);
        if (length > 0) {
            const auto code = static_cast<unsigned char>(text[i + length - 1]);
            std::array<char, 8> escape{};
            std::snprintf(escape.data(), escape.size(), "\\x%02X", static_cast<unsigned>(code));
            shown += escape.data();
            i += length;
        } else {
            shown += text[i++];
        }
    }
    return shown + "'";
}

std::string what_was_read(const YamlNode& node) {
    switch (node.kind) {
    case YamlNode::Kind::empty:
        return "empty";
    case YamlNode::Kind::list:
        return "a list";
    case YamlNode::Kind::map:
        return "a group of keys";
    case YamlNode::Kind::scalar:
        break;
    }
    return (node.quoted ? "the text " : "") + in_quotes(node.text);
}

/// The number that a plain scalar spells in full; infinities and not-a-numbers are none.
template <class Number>
std::optional<Number> spelt_number(const YamlNode& node) {
    if (node.kind != YamlNode::Kind::scalar || node.quoted) {
        return std::nullopt;
    }
    std::string_view text = node.text;
    if (text.size() > 1 && text[0] == '+' && text[1] != '-') {
        text.remove_prefix(1);
    }
    Number number{};
    const auto read = std::from_chars(text.data(), text.data() + text.size(), number);
    if (read.ec != std::errc{} || read.ptr != text.data() + text.size() ||
        !std::isfinite(static_cast<double>(number))) {
        return std::nullopt;
    }
    return number;
}

bool contains(const Range& range, double number) {
    return number >= range.low && number <= range.high;
}

std::string join(std::span<const std::string> words, std::string_view last) {
    std::string all;
    for (std::size_t i = 0; i < words.size(); ++i) {
        if (i > 0) {
            all += i + 1 == words.size() ? last : ", ";
        }
        all += words[i];
    }
    return all;
}

/// The key meant by `key`: one of the known ones, or one that belongs into a group below.
std::optional<std::string> probably_meant(std::string_view key, std::span<const std::string> known,
                                          std::span<const KeyDescription> described) {
    for (const KeyDescription& description : described) {
        const std::size_t dot = description.path.rfind('.');
        if (dot != std::string::npos && description.path.substr(dot + 1) == key) {
            return description.path;
        }
    }
    return nearest(key, known);
}

} // namespace

std::string Range::text() const {
    const std::string ends = shortest(low) + " to " + shortest(high);
    return unit.empty() ? ends : ends + " " + std::string{unit};
}

std::string either(std::span<const std::string> words) {
    return join(words, " or ");
}

YamlValue::YamlValue(const YamlDocument& document) : YamlValue{document, document.root, ""} {}

YamlValue::YamlValue(const YamlDocument& document, const YamlNode& node, std::string path)
    : m_document{&document}, m_node{&node}, m_path{std::move(path)} {}

Result<double> YamlValue::number(const Range& range) const {
    const auto number = spelt_number<double>(*m_node);
    if (!number) {
        return must_be("a number, " + range.text());
    }
    if (!contains(range, *number)) {
        return must_be(range.text());
    }
    return *number;
}

Result<std::int64_t> YamlValue::whole_number(const Range& range) const {
    const auto number = spelt_number<std::int64_t>(*m_node);
    if (!number) {
        return must_be("a whole number, " + range.text());
    }
    if (!contains(range, static_cast<double>(*number))) {
        return must_be(range.text());
    }
    return *number;
}

Result<bool> YamlValue::truth() const {
    if (m_node->kind == YamlNode::Kind::scalar && !m_node->quoted) {
        if (m_node->text == "true") {
            return true;
        }
        if (m_node->text == "false") {
            return false;
        }
    }
    return must_be("true or false");
}

Result<std::string> YamlValue::text() const {
    if (m_node->kind != YamlNode::Kind::scalar && !is_empty()) {
        return must_be("a text");
    }
    if (has_control(m_node->text)) {
        return must_be("a text of one line without control characters");
    }
    return m_node->text;
}

Result<std::size_t> YamlValue::choice(std::span<const std::string> words) const {
    if (m_node->kind == YamlNode::Kind::scalar) {
        const auto found = std::find(words.begin(), words.end(), m_node->text);
        if (found != words.end()) {
            return static_cast<std::size_t>(found - words.begin());
        }
    }
    return must_be(either(words));
}

Result<std::vector<YamlValue>> YamlValue::items() const {
    if (m_node->kind != YamlNode::Kind::list && !is_empty()) {
        return must_be("a list");
    }
    std::vector<YamlValue> values;
    for (const YamlNode& child : m_node->children) {
        values.push_back(
            YamlValue{*m_document, child, m_path + "[" + std::to_string(values.size() + 1) + "]"});
    }
    return values;
}

Result<std::vector<YamlValue>> YamlValue::entries() const {
    if (m_node->kind != YamlNode::Kind::map && !is_empty()) {
        return must_be("a group of keys");
    }
    std::vector<YamlValue> values;
    for (const YamlNode& child : m_node->children) {
        values.push_back(
            YamlValue{*m_document, child, m_path.empty() ? child.key : m_path + "." + child.key});
    }
    return values;
}

tl::unexpected<Error> YamlValue::must_be(const std::string& allowed) const {
    const std::string name = m_path.empty() ? "the file" : m_path;
    return refuse(name + " is " + what_was_read(*m_node) + ", but must be " + allowed);
}

tl::unexpected<Error> YamlValue::refuse(const std::string& sentence) const {
    return fail(ErrorCode::bad_value,
                place(m_document->file, position_of(m_document->text, m_node->offset)) + ": " +
                    sentence);
}

tl::unexpected<Error> YamlValue::refuse_key(const std::string& sentence) const {
    return fail(ErrorCode::bad_value,
                place(m_document->file, position_of(m_document->text, m_node->key_offset)) + ": " +
                    sentence);
}

tl::unexpected<Error> YamlValue::lacks(const std::string& key) const {
    return refuse((m_path.empty() ? "the file" : m_path) + " lacks the key '" + key + "'");
}

Result<std::size_t> find_key(const YamlValue& map, const YamlValue& value,
                             std::span<const std::string> known,
                             std::span<const KeyDescription> described) {
    const auto found = std::find(known.begin(), known.end(), value.key());
    if (found != known.end()) {
        return static_cast<std::size_t>(found - known.begin());
    }
    const std::string where = map.path().empty() ? "" : " in " + map.path();
    const auto meant = probably_meant(value.key(), known, described);
    const std::string hint =
        meant ? "did you mean '" + *meant + "'?" : "the keys here are " + join(known, " and ");
    return value.refuse_key("unknown key " + in_quotes(value.key()) + where + "; " + hint);
}

} // namespace sagitta::config
