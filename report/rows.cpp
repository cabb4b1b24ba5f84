#include "report/rows.hpp"

#include <array>
#include <cassert>
#include <cerrno>
#include <charconv>
#include <cmath>
#include <cstring>
#include <date/date.h>
#include <fmt/format.h>

namespace sagitta::report {
namespace {

constexpr std::size_t k_buffer_bytes = std::size_t{64} * 1024;

std::string csv_text(std::string_view value) {
    if (value.find_first_of(",\"\r\n") == std::string_view::npos) {
        return std::string{value};
    }
    std::string quoted = "\"";
    for (const char c : value) {
        quoted += c;
        if (c == '"') {
            quoted += c;
        }
    }
    return quoted + "\"";
}

std::string json_text(std::string_view value) {
    std::string quoted = "\"";
    for (const char c : value) {
        if (c == '"' || c == '\\') {
            quoted += '\\';
            quoted += c;
        } else if (static_cast<unsigned char>(c) < 0x20) {
            quoted += fmt::format("\\u{:04x}", static_cast<unsigned>(c));
        } else {
            quoted += c;
        }
    }
    return quoted + "\"";
}

void append_two_digits(std::string& out, std::int64_t value) {
    out += static_cast<char>('0' + value / 10 % 10);
    out += static_cast<char>('0' + value % 10);
}

} // namespace

RowWriter::RowWriter(RowFormat format, std::vector<std::string> columns, std::FILE* out)
    : m_format{format}, m_columns{std::move(columns)}, m_out{out} {
    m_buffer.reserve(k_buffer_bytes + 4096);
    if (m_format == RowFormat::csv) {
        for (std::size_t c = 0; c < m_columns.size(); ++c) {
            m_buffer += (c == 0 ? "" : ",") + m_columns[c];
        }
        m_buffer += '\n';
        return;
    }
    for (std::size_t c = 0; c < m_columns.size(); ++c) {
        m_columns[c] = (c == 0 ? "{" : ",") + json_text(m_columns[c]) + ":";
    }
}

void RowWriter::begin_cell() {
    assert(m_column < m_columns.size());
    if (m_format == RowFormat::jsonl) {
        m_buffer += m_columns[m_column];
    } else if (m_column > 0) {
        m_buffer += ',';
    }
    ++m_column;
}

void RowWriter::text(std::string_view value) {
    begin_cell();
    m_buffer += m_format == RowFormat::csv ? csv_text(value) : json_text(value);
}

void RowWriter::number(double value) {
    begin_cell();
    if (!std::isfinite(value)) {
        m_buffer += m_format == RowFormat::csv ? "" : "null";
        return;
    }
    std::array<char, 32> digits{};
    const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), value).ptr;
    m_buffer.append(digits.data(), end);
}

void RowWriter::whole(std::int64_t value) {
    begin_cell();
    std::array<char, 32> digits{};
    const auto end = std::to_chars(digits.data(), digits.data() + digits.size(), value).ptr;
    m_buffer.append(digits.data(), end);
}

void RowWriter::time(estimator::UtcTime value) {
    begin_cell();
    const auto day = std::chrono::floor<date::days>(value);
    const std::int64_t day_number = day.time_since_epoch().count();
    if (day_number != m_day || m_day_text.empty()) {
        const date::year_month_day ymd{date::sys_days{day.time_since_epoch()}};
        m_day = day_number;
        m_day_text = fmt::format("{:04}-{:02}-{:02}T", int{ymd.year()}, unsigned{ymd.month()},
                                 unsigned{ymd.day()});
    }
    const std::int64_t micros = (value - day).count();
    if (m_format == RowFormat::jsonl) {
        m_buffer += '"';
    }
    m_buffer += m_day_text;
    append_two_digits(m_buffer, micros / 3'600'000'000);
    m_buffer += ':';
    append_two_digits(m_buffer, micros / 60'000'000 % 60);
    m_buffer += ':';
    append_two_digits(m_buffer, micros / 1'000'000 % 60);
    m_buffer += '.';
    append_two_digits(m_buffer, micros / 10'000);
    append_two_digits(m_buffer, micros / 100);
    append_two_digits(m_buffer, micros);
    m_buffer += m_format == RowFormat::jsonl ? "Z\"" : "Z";
}

void RowWriter::end_row() {
    assert(m_column == m_columns.size());
    m_buffer += m_format == RowFormat::jsonl ? "}\n" : "\n";
    m_column = 0;
    if (m_buffer.size() >= k_buffer_bytes) {
        write_out();
    }
}

void RowWriter::write_out() {
    if (!m_reader_gone && m_errno == 0 &&
        (std::fwrite(m_buffer.data(), 1, m_buffer.size(), m_out) != m_buffer.size() ||
         std::fflush(m_out) != 0)) {
        const int error = errno;
        if (error == EPIPE) {
            m_reader_gone = true;
        } else {
            m_errno = error;
        }
    }
    m_buffer.clear();
}

estimator::Result<void> RowWriter::finish() {
    write_out();
    if (m_errno != 0) {
        const auto code =
            m_errno == ENOSPC ? estimator::ErrorCode::no_space : estimator::ErrorCode::io;
        return estimator::fail(code, fmt::format("the rows could not be written to standard "
                                                 "output: {}; free space or choose another place "
                                                 "and export again",
                                                 std::strerror(m_errno)));
    }
    return {};
}

} // namespace sagitta::report
