// Rows for other programs: CSV (quoting by RFC 4180, lines ended by LF) or JSON Lines. Numbers are
// the shortest text that reads back exactly.
#pragma once

#include "estimator/result.hpp"
#include "estimator/units.hpp"

#include <cstdint>
#include <cstdio>
#include <string>
#include <string_view>
#include <vector>

namespace sagitta::report {

enum class RowFormat { csv, jsonl };

/// Writes rows of named columns to a stream, cell by cell from left to right. A reader that closes
/// its end stops the writing quietly.
class RowWriter {
public:
    /// @param out  outlives the writer; the CSV header is written at once
    RowWriter(RowFormat format, std::vector<std::string> columns, std::FILE* out);

    void text(std::string_view value);
    /// Not finite: an empty cell, null in JSON.
    void number(double value);
    void whole(std::int64_t value);
    /// ISO 8601 with microseconds and Z.
    void time(estimator::UtcTime value);
    /// Precondition: every column has its cell.
    void end_row();
    /// Nothing more will be read: rows may be skipped.
    [[nodiscard]] bool reader_gone() const { return m_reader_gone; }
    /// Writes what is left. @return no_space, io
    [[nodiscard]] estimator::Result<void> finish();

private:
    void begin_cell();
    void write_out();

    RowFormat m_format;
    std::vector<std::string> m_columns;
    std::FILE* m_out;
    std::string m_buffer;
    std::size_t m_column = 0;
    std::int64_t m_day = -1; ///< whose text m_day_text is
    std::string m_day_text;
    bool m_reader_gone = false;
    int m_errno = 0; ///< of the first failed write
};

} // namespace sagitta::report
