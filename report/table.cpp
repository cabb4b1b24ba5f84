#include "report/table.hpp"

#include <algorithm>

namespace sagitta::report {
namespace {

/// Length in bytes of the UTF-8 sequence at the start of `text`; 0 when it is broken.
std::size_t sequence_length(std::string_view text) {
    const auto lead = static_cast<unsigned char>(text.front());
    std::size_t length = 0;
    if (lead < 0x80) {
        length = 1;
    } else if (lead >= 0xC2 && lead < 0xE0) {
        length = 2;
    } else if (lead >= 0xE0 && lead < 0xF0) {
        length = 3;
    } else if (lead >= 0xF0 && lead < 0xF5) {
        length = 4;
    }
    if (length == 0 || length > text.size()) {
        return 0;
    }
    for (std::size_t i = 1; i < length; ++i) {
        if ((static_cast<unsigned char>(text[i]) & 0xC0U) != 0x80U) {
            return 0;
        }
    }
    return length;
}

bool is_control(std::string_view sequence) {
    const auto first = static_cast<unsigned char>(sequence.front());
    const bool c0 = sequence.size() == 1 && (first < 0x20 || first == 0x7F);
    const bool c1 =
        sequence.size() == 2 && first == 0xC2 && static_cast<unsigned char>(sequence[1]) < 0xA0;
    return c0 || c1;
}

} // namespace

Table::Table(std::vector<Column> columns) : m_columns{std::move(columns)} {}

void Table::add(std::vector<std::string> cells) {
    cells.resize(m_columns.size());
    m_rows.push_back(std::move(cells));
}

std::string Table::text(std::size_t indent) const {
    std::vector<std::size_t> widths(m_columns.size(), 0);
    for (const auto& row : m_rows) {
        for (std::size_t c = 0; c < row.size(); ++c) {
            widths[c] = std::max(widths[c], width_of(row[c]));
        }
    }
    bool titled = false;
    for (std::size_t c = 0; c < m_columns.size(); ++c) {
        titled = titled || !m_columns[c].title.empty();
        if (widths[c] > 0) {
            widths[c] = std::max(widths[c], width_of(m_columns[c].title));
        }
    }
    std::string out;
    const auto add_line = [&](auto&& cell_of) {
        std::string line(indent, ' ');
        bool first = true;
        for (std::size_t c = 0; c < m_columns.size(); ++c) {
            if (widths[c] == 0) {
                continue;
            }
            line += first ? "" : "  ";
            first = false;
            const std::string& cell = cell_of(c);
            const std::string blanks(widths[c] - width_of(cell), ' ');
            line += m_columns[c].align == Align::right ? blanks + cell : cell + blanks;
        }
        line.erase(line.find_last_not_of(' ') + 1);
        out += line + "\n";
    };
    if (titled) {
        add_line([&](std::size_t c) -> const std::string& { return m_columns[c].title; });
    }
    for (const auto& row : m_rows) {
        add_line([&](std::size_t c) -> const std::string& { return row[c]; });
    }
    return out;
}

std::size_t width_of(std::string_view text) {
    return static_cast<std::size_t>(std::count_if(text.begin(), text.end(), [](char c) {
        return (static_cast<unsigned char>(c) & 0xC0U) != 0x80U;
    }));
}

std::string printable(std::string_view name) {
    std::string out;
    while (!name.empty()) {
        const std::size_t length = sequence_length(name);
        const std::string_view sequence = name.substr(0, std::max<std::size_t>(length, 1));
        out += length == 0 || is_control(sequence) ? std::string_view{"?"} : sequence;
        name.remove_prefix(sequence.size());
    }
    return out;
}

std::string shortened(std::string_view text, std::size_t width) {
    if (width_of(text) <= width) {
        return std::string{text};
    }
    std::string out;
    for (std::size_t places = 0; places + 1 < width; ++places) {
        const std::size_t length = std::max<std::size_t>(sequence_length(text), 1);
        out += text.substr(0, length);
        text.remove_prefix(length);
    }
    return out + "…";
}

std::string wrapped(std::string_view paragraph, std::size_t width) {
    std::string out;
    std::string line;
    while (!paragraph.empty()) {
        const std::size_t blank = std::min(paragraph.find(' '), paragraph.size());
        const std::string_view word = paragraph.substr(0, blank);
        paragraph.remove_prefix(std::min(blank + 1, paragraph.size()));
        if (!line.empty() && width_of(line) + 1 + width_of(word) > width) {
            out += line + "\n";
            line.clear();
        }
        line += line.empty() ? "" : " ";
        line += word;
    }
    return line.empty() ? out : out + line + "\n";
}

std::string under_heading(std::string_view paragraph) {
    std::string text = "  " + wrapped(paragraph, 94);
    for (std::size_t end = text.find('\n'); end + 1 < text.size(); end = text.find('\n', end + 1)) {
        text.insert(end + 1, "  ");
    }
    return text;
}

} // namespace sagitta::report
