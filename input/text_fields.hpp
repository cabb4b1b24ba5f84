// Fields of a line of text, separated by blanks.
#pragma once

#include "input/packet.hpp"

#include <cstdint>
#include <optional>
#include <string_view>

namespace sagitta::input {

/// Seconds and microseconds of a kernel stamp.
struct TextStamp {
    std::int64_t seconds;
    std::int32_t microseconds;
};

/// Takes fields from the front. A field that does not parse as a whole gives nothing.
class TextFields {
public:
    explicit TextFields(std::string_view text) : m_text{text} {}

    [[nodiscard]] bool at_end();
    [[nodiscard]] std::optional<std::uint32_t> hex();
    [[nodiscard]] std::optional<std::int32_t> decimal();
    /// "sec.usec", usec with six digits.
    [[nodiscard]] std::optional<TextStamp> stamp();
    /// All that is left, without blanks around it.
    [[nodiscard]] std::string_view rest();

private:
    std::string_view field();
    std::string_view m_text;
};

/// The whole of `text` as a number in `base`; nothing if it is none or does not fit.
[[nodiscard]] std::optional<std::int64_t> parse_integer(std::string_view text, int base = 10);
[[nodiscard]] std::string_view trimmed(std::string_view text);

} // namespace sagitta::input
