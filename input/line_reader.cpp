#include "input/line_reader.hpp"

#include <cstring>

namespace sagitta::input {

namespace {
constexpr std::size_t k_buffer_bytes = 64 * 1024;
static_assert(k_buffer_bytes > 2 * k_longest_line);
} // namespace

LineReader::LineReader(Descriptor file, std::filesystem::path name)
    : m_file{std::move(file)}, m_name{std::move(name)}, m_buffer(k_buffer_bytes) {}

/// Moves what is left to the front and reads on. @return false at the end of the file
estimator::Result<bool> LineReader::refill() {
    if (m_at_end)
        return false;
    std::memmove(m_buffer.data(), m_buffer.data() + m_begin, m_end - m_begin);
    m_end -= m_begin;
    m_begin = 0;
    const auto space = std::span{m_buffer}.subspan(m_end);
    const auto got = read_full(m_file.get(), space, m_name);
    if (!got)
        return tl::unexpected{got.error()};
    m_at_end = *got < space.size();
    m_end += *got;
    return *got > 0;
}

estimator::Result<std::optional<Line>> LineReader::next() {
    std::size_t searched = 0;
    bool too_long = false;
    while (true) {
        const char* begin = reinterpret_cast<const char*>(m_buffer.data()) + m_begin;
        const std::string_view rest{begin, m_end - m_begin};
        const std::size_t newline = rest.find('\n', searched);
        if (newline != std::string_view::npos) {
            m_begin += newline + 1;
            if (too_long || newline > k_longest_line)
                return Line{rest.substr(0, std::min(newline, k_longest_line)), ++m_number, true,
                            false};
            std::string_view text = rest.substr(0, newline);
            if (!text.empty() && text.back() == '\r')
                text.remove_suffix(1);
            return Line{text, ++m_number, false, false};
        }
        searched = rest.size();
        if (rest.size() > k_longest_line) { // skip it without keeping it
            too_long = true;
            m_begin = m_end;
            searched = 0;
        }
        const auto more = refill();
        if (!more)
            return tl::unexpected{more.error()};
        if (*more)
            continue;
        const std::string_view last{reinterpret_cast<const char*>(m_buffer.data()) + m_begin,
                                    m_end - m_begin};
        m_begin = m_end;
        if (last.empty() && !too_long)
            return std::nullopt;
        return Line{last.substr(0, std::min(last.size(), k_longest_line)), ++m_number, too_long,
                    true};
    }
}

} // namespace sagitta::input
