// Lines of a text file of any size, in memory of fixed size.
#pragma once

#include "input/file.hpp"

#include <cstdint>
#include <optional>
#include <string_view>
#include <vector>

namespace sagitta::input {

/// A line without its end. `number` counts from 1.
struct Line {
    std::string_view text; ///< valid until the next call; cut at k_longest_line
    std::uint64_t number;
    bool too_long;
    bool is_cut; ///< the file ended before the line did
};

constexpr std::size_t k_longest_line = 4096;

class LineReader {
public:
    LineReader(Descriptor file, std::filesystem::path name);

    /// @return nothing at the end of the file; io
    [[nodiscard]] estimator::Result<std::optional<Line>> next();

private:
    [[nodiscard]] estimator::Result<bool> refill();

    Descriptor m_file;
    std::filesystem::path m_name;
    std::vector<std::byte> m_buffer;
    std::size_t m_begin = 0, m_end = 0;
    std::uint64_t m_number = 0;
    bool m_at_end = false;
};

} // namespace sagitta::input
