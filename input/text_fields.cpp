#include "input/text_fields.hpp"

#include <charconv>
#include <limits>

namespace sagitta::input {

namespace {
constexpr std::string_view k_blank = " \t\r";
}

std::optional<std::int64_t> parse_integer(std::string_view text, int base) {
    std::int64_t value = 0;
    const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value, base);
    if (error != std::errc{} || end != text.data() + text.size())
        return std::nullopt;
    return value;
}

std::string_view trimmed(std::string_view text) {
    const std::size_t first = text.find_first_not_of(k_blank);
    if (first == std::string_view::npos)
        return {};
    return text.substr(first, text.find_last_not_of(k_blank) - first + 1);
}

std::string_view TextFields::field() {
    const std::size_t first = m_text.find_first_not_of(k_blank);
    if (first == std::string_view::npos) {
        m_text = {};
        return {};
    }
    m_text.remove_prefix(first);
    const std::string_view taken = m_text.substr(0, m_text.find_first_of(k_blank));
    m_text.remove_prefix(taken.size());
    return taken;
}

bool TextFields::at_end() {
    return rest().empty();
}

std::string_view TextFields::rest() {
    return trimmed(m_text);
}

std::optional<std::uint32_t> TextFields::hex() {
    const auto value = parse_integer(field(), 16);
    if (!value || *value < 0 || *value > std::numeric_limits<std::uint32_t>::max())
        return std::nullopt;
    return static_cast<std::uint32_t>(*value);
}

std::optional<std::int32_t> TextFields::decimal() {
    const auto value = parse_integer(field());
    if (!value || *value < std::numeric_limits<std::int32_t>::min() ||
        *value > std::numeric_limits<std::int32_t>::max())
        return std::nullopt;
    return static_cast<std::int32_t>(*value);
}

std::optional<TextStamp> TextFields::stamp() {
    constexpr std::size_t k_microsecond_digits = 6;
    const std::string_view text = field();
    const std::size_t dot = text.find('.');
    if (dot == std::string_view::npos || text.size() - dot - 1 != k_microsecond_digits)
        return std::nullopt;
    const auto seconds = parse_integer(text.substr(0, dot));
    const auto microseconds = parse_integer(text.substr(dot + 1));
    if (!seconds || *seconds < 0 || *seconds >= k_seconds_end || !microseconds || *microseconds < 0)
        return std::nullopt;
    return TextStamp{*seconds, static_cast<std::int32_t>(*microseconds)};
}

} // namespace sagitta::input
