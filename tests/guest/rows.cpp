#include "tests/guest/rows.hpp"

#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <iomanip>
#include <sstream>
#include <stdexcept>

namespace sagitta::guest {
namespace {

constexpr double k_distance_tolerance_px = 1.0;
constexpr double k_time_tolerance_ms = 5.0;
/// A movement whose reports came late by more than this had another profile of speed than the one
/// sent, and so another start: it is judged by the kernel's record of it alone.
constexpr double k_stalled_ms = 5.0;
/// Jitter counts from this long before a movement's start, because the smoothing sees that far.
constexpr std::int64_t k_before_start_us = 100'000;

std::vector<std::string> cells_of(const std::string& line) {
    std::vector<std::string> cells;
    std::istringstream stream{line};
    std::string cell;
    while (std::getline(stream, cell, ',')) {
        cells.push_back(cell);
    }
    return cells;
}

/// CSV without quoted cells, which the names of this test do not need.
class Table {
public:
    explicit Table(const std::string& csv) {
        std::istringstream stream{csv};
        std::string line;
        std::getline(stream, line);
        m_names = cells_of(line);
        while (std::getline(stream, line)) {
            m_rows.push_back(cells_of(line));
        }
    }
    [[nodiscard]] std::size_t rows() const { return m_rows.size(); }
    [[nodiscard]] const std::string& cell(std::size_t row, const std::string& name) const {
        return m_rows[row].at(column(name));
    }
    /// Everything from a column on, as written.
    [[nodiscard]] std::string from(std::size_t row, const std::string& name) const {
        std::string text;
        for (std::size_t i = column(name); i < m_rows[row].size(); ++i) {
            text += m_rows[row][i] + ",";
        }
        return text;
    }

private:
    [[nodiscard]] std::size_t column(const std::string& name) const {
        const auto at = std::find(m_names.begin(), m_names.end(), name);
        if (at == m_names.end()) {
            throw std::runtime_error{"the export has no column " + name};
        }
        return static_cast<std::size_t>(at - m_names.begin());
    }

    std::vector<std::string> m_names;
    std::vector<std::vector<std::string>> m_rows;
};

/// "2026-03-04T09:00:00.123456Z" to us since 1970.
std::int64_t micros_of(const std::string& text) {
    int year = 0, month = 0, day = 0, hour = 0, minute = 0, second = 0, micros = 0;
    // The same form for every row, so the fixed fields are enough.
    if (std::sscanf(text.c_str(), "%d-%d-%dT%d:%d:%d.%6dZ", &year, &month, &day, &hour, &minute,
                    &second, &micros) != 7) {
        throw std::runtime_error{"not a time of an export: " + text};
    }
    const std::chrono::sys_days date = std::chrono::year{year} / month / day;
    const auto time = date + std::chrono::hours{hour} + std::chrono::minutes{minute} +
                      std::chrono::seconds{second} + std::chrono::microseconds{micros};
    return time.time_since_epoch().count();
}

std::string with_unit(double value, const char* unit) {
    std::ostringstream stream;
    stream << std::fixed << std::setprecision(3) << value << ' ' << unit;
    return stream.str();
}

bool same_kinds(const std::vector<Row>& a, const std::vector<Row>& b) {
    return std::equal(a.begin(), a.end(), b.begin(), b.end(), [](const Row& x, const Row& y) {
        return x.kind == y.kind && x.button == y.button;
    });
}

} // namespace

std::vector<Row> rows_of(const std::string& csv) {
    const Table table{csv};
    std::vector<Row> rows;
    for (std::size_t i = 0; i < table.rows(); ++i) {
        rows.push_back({micros_of(table.cell(i, "start_utc")),
                        micros_of(table.cell(i, "press_utc")), table.cell(i, "kind"),
                        table.cell(i, "button"), std::stod(table.cell(i, "distance_px")),
                        std::stod(table.cell(i, "movement_time_ms")), table.from(i, "kind")});
    }
    return rows;
}

double sum_of_column(const std::string& csv, const std::string& name) {
    const Table table{csv};
    double sum = 0.0;
    for (std::size_t i = 0; i < table.rows(); ++i) {
        sum += std::stod(table.cell(i, name));
    }
    return sum;
}

void Checks::expect(bool holds, const std::string& sentence, const std::string& detail) {
    ++(holds ? m_passed : m_failed);
    std::printf("%s: %s%s%s\n", holds ? "ok" : "FAILED", sentence.c_str(),
                detail.empty() ? "" : ": ", detail.c_str());
    std::fflush(stdout);
}

int Checks::close() const {
    std::printf("%d passed, %d failed\n", m_passed, m_failed);
    return m_failed == 0 && m_passed > 0 ? 0 : 1;
}

void compare_with_sent(Checks& checks, const Sent& sent, const std::vector<Packet>& seen,
                       const std::vector<Row>& found) {
    const std::vector<Row>& expected = sent.expected;
    const bool one_for_one = !expected.empty() && same_kinds(expected, found);
    checks.expect(one_for_one, "the movements of the " + sent.name + " are those sent, one for one",
                  std::to_string(expected.size()) + " sent, " + std::to_string(found.size()) +
                      " found");
    if (!one_for_one) {
        return;
    }
    const std::vector<Delay> late = delays(sent.planned, seen);
    double worst_distance = 0.0;
    double worst_time = 0.0;
    double worst_jitter = 0.0;
    double worst_excess = -k_time_tolerance_ms;
    std::size_t stalled = 0;
    for (std::size_t i = 0; i < found.size(); ++i) {
        const double jitter_ms =
            static_cast<double>(
                jitter_us(late, expected[i].start_us - k_before_start_us, expected[i].press_us)) /
            1000.0;
        const double time_ms = std::abs(found[i].movement_time_ms - expected[i].movement_time_ms);
        worst_distance =
            std::max(worst_distance, std::abs(found[i].distance_px - expected[i].distance_px));
        if (jitter_ms > k_stalled_ms) {
            ++stalled; // what was sent had another profile of speed, and so another start
            continue;
        }
        worst_time = std::max(worst_time, time_ms);
        worst_jitter = std::max(worst_jitter, jitter_ms);
        worst_excess = std::max(worst_excess, time_ms - jitter_ms - k_time_tolerance_ms);
    }
    checks.expect(worst_distance <= k_distance_tolerance_px,
                  "their distances are within 1 px of those sent",
                  "at most " + with_unit(worst_distance, "px") + " off");
    std::printf("%zu of the %zu movements of the %s were delayed by the emulator and are judged by "
                "the kernel's record alone\n",
                stalled, found.size(), sent.name.c_str());
    if (stalled == found.size()) {
        return; // nothing was left to judge, so nothing is claimed
    }
    checks.expect(worst_excess <= 0.0,
                  "their movement times are within 5 ms and the emulator's jitter of those sent",
                  "at most " + with_unit(worst_time, "ms") + " off, jitter at most " +
                      with_unit(worst_jitter, "ms"));
}

void compare_with_replay(Checks& checks, const std::string& name, const std::vector<Row>& replayed,
                         const std::vector<Row>& found) {
    std::size_t different = replayed.size() == found.size() ? 0 : 1;
    for (std::size_t i = 0; i < std::min(replayed.size(), found.size()); ++i) {
        different += replayed[i].scores == found[i].scores ? 0U : 1U;
        if (replayed[i].scores != found[i].scores && different <= 3) {
            std::printf("    replayed %s\n    live     %s\n", replayed[i].scores.c_str(),
                        found[i].scores.c_str());
        }
    }
    checks.expect(different == 0 && !found.empty(),
                  "every score of the " + name + " is that of a replay of the same kernel events",
                  std::to_string(found.size()) + " movements");
}

} // namespace sagitta::guest
