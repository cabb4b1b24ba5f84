// Plain tables for a fixed-width screen, and the cleaning of names that come from outside.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace sagitta::report {

enum class Align { left, right };

/// Rows of text cells under a header, in columns as wide as their widest cell.
class Table {
public:
    struct Column {
        std::string title;
        Align align;
    };
    explicit Table(std::vector<Column> columns);

    /// @param cells  one a column; shorter rows are filled with empty cells
    void add(std::vector<std::string> cells);
    [[nodiscard]] bool empty() const { return m_rows.empty(); }
    /// One line a row, each begun by `indent` spaces and without blanks at its end; the header is
    /// left out when no column has a title. Columns without any text are left out.
    [[nodiscard]] std::string text(std::size_t indent = 2) const;

private:
    std::vector<Column> m_columns;
    std::vector<std::vector<std::string>> m_rows;
};

/// Places that a UTF-8 text takes on the screen, one a code point.
[[nodiscard]] std::size_t width_of(std::string_view text);
/// Names come from devices and files: control characters and broken UTF-8 become '?', so that
/// they cannot steer a terminal.
[[nodiscard]] std::string printable(std::string_view name);
/// At most `width` places; what is cut shows as "…".
[[nodiscard]] std::string shortened(std::string_view text, std::size_t width);
/// Breaks a paragraph at blanks into lines of at most `width` places, each ended by a newline.
[[nodiscard]] std::string wrapped(std::string_view paragraph, std::size_t width = 96);

/// A paragraph that stands under a heading as a table does: every line indented by 2.
[[nodiscard]] std::string under_heading(std::string_view paragraph);

} // namespace sagitta::report
