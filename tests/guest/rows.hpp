// Rows of `sagitta export`, and the checks that lay what was found beside what was sent.
#pragma once

#include "tests/guest/packets.hpp"

#include <string>
#include <vector>

namespace sagitta::guest {

struct Row {
    std::int64_t start_us, press_us; ///< UTC
    std::string kind;
    std::string button;
    double distance_px;
    double movement_time_ms;
    std::string scores; ///< every column from `kind` on, as written
};

/// Reads the CSV of `sagitta export`; throws std::runtime_error when a column is missing.
[[nodiscard]] std::vector<Row> rows_of(const std::string& csv);

/// Sum over the rows of an export; throws std::runtime_error when the column is missing.
[[nodiscard]] double sum_of_column(const std::string& csv, const std::string& name);

/// Counts what held and what did not, and tells each in a sentence.
class Checks {
public:
    /// @param detail  figures, shown either way
    void expect(bool holds, const std::string& sentence, const std::string& detail = {});
    /// Prints the closing line. @return the exit code
    int close() const;

private:
    int m_passed = 0;
    int m_failed = 0;
};

/// The movements of one pointer.
struct Sent {
    std::string name;            ///< for the sentences
    std::vector<Packet> planned; ///< the recording that was sent
    std::vector<Row> expected;   ///< its replay
};

/// One for one: number and kinds; D within 1 px; MT within 5 ms and the emulator's jitter, which is
/// read from the kernel's own stamps in `seen`.
void compare_with_sent(Checks& checks, const Sent& sent, const std::vector<Packet>& seen,
                       const std::vector<Row>& found);

/// What was recorded live is what a replay of the same kernel events gives, in every score.
void compare_with_replay(Checks& checks, const std::string& name, const std::vector<Row>& replayed,
                         const std::vector<Row>& found);

} // namespace sagitta::guest
