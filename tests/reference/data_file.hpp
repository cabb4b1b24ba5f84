// Reads the small tables in tests/reference/data.
#pragma once

#include <cstddef>
#include <map>
#include <string>
#include <vector>

namespace sagitta::tests {

/// A comma-separated table with one line of column names.
class DataFile {
public:
    /// @param name  file in tests/reference/data. Throws when it cannot be read.
    explicit DataFile(const std::string& name);

    [[nodiscard]] std::size_t rows() const { return m_rows; }
    [[nodiscard]] const std::vector<double>& column(const std::string& name) const;
    [[nodiscard]] const std::vector<std::string>& text_column(const std::string& name) const;
    /// A value; not a number where the cell is empty.
    [[nodiscard]] double at(const std::string& name, std::size_t row) const;

private:
    std::size_t m_rows = 0;
    std::map<std::string, std::vector<std::string>> m_text;
    std::map<std::string, std::vector<double>> m_numbers;
};

struct XY {
    std::vector<double> x, y;
};

/// Lines 61 onwards of a NIST StRD regression file: y, then x.
[[nodiscard]] XY read_strd_pairs(const std::string& name);

} // namespace sagitta::tests
