#include "tests/reference/data_file.hpp"

#include <cstdlib>
#include <fstream>
#include <limits>
#include <sstream>
#include <stdexcept>

namespace sagitta::tests {
namespace {

std::ifstream open(const std::string& name) {
    const std::string path = std::string{SAGITTA_TEST_DATA} + "/reference/data/" + name;
    std::ifstream file{path};
    if (!file) {
        throw std::runtime_error{"cannot read " + path};
    }
    return file;
}

std::vector<std::string> split(const std::string& line) {
    std::vector<std::string> cells(1);
    for (const char c : line) {
        if (c == ',') {
            cells.emplace_back();
        } else if (c != '\r') {
            cells.back() += c;
        }
    }
    return cells;
}

double to_number(const std::string& text) {
    char* end = nullptr;
    const double value = std::strtod(text.c_str(), &end);
    return end == text.c_str() ? std::numeric_limits<double>::quiet_NaN() : value;
}

} // namespace

DataFile::DataFile(const std::string& name) {
    std::ifstream file = open(name);
    std::string line;
    std::getline(file, line);
    const std::vector<std::string> names = split(line);
    while (std::getline(file, line)) {
        const std::vector<std::string> cells = split(line);
        if (cells.size() != names.size()) {
            throw std::runtime_error{name + " has a row of another length: " + line};
        }
        for (std::size_t i = 0; i < names.size(); ++i) {
            m_text[names[i]].push_back(cells[i]);
            m_numbers[names[i]].push_back(to_number(cells[i]));
        }
        ++m_rows;
    }
}

const std::vector<double>& DataFile::column(const std::string& name) const {
    return m_numbers.at(name);
}

const std::vector<std::string>& DataFile::text_column(const std::string& name) const {
    return m_text.at(name);
}

double DataFile::at(const std::string& name, std::size_t row) const {
    return m_numbers.at(name).at(row);
}

XY read_strd_pairs(const std::string& name) {
    std::ifstream file = open(name);
    XY pairs;
    std::string line;
    for (int number = 1; std::getline(file, line); ++number) {
        std::istringstream cells{line};
        double y = 0.0;
        double x = 0.0;
        if (number >= 61 && cells >> y >> x) {
            pairs.x.push_back(x);
            pairs.y.push_back(y);
        }
    }
    return pairs;
}

} // namespace sagitta::tests
