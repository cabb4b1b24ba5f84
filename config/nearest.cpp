#include "config/nearest.hpp"

#include <algorithm>
#include <vector>

namespace sagitta::config {
namespace {

constexpr std::size_t k_longest_word = 64;

} // namespace

std::size_t edit_distance(std::string_view a, std::string_view b) {
    std::vector<std::size_t> before_last(b.size() + 1);
    std::vector<std::size_t> last(b.size() + 1);
    std::vector<std::size_t> row(b.size() + 1);
    for (std::size_t j = 0; j <= b.size(); ++j) {
        last[j] = j;
    }
    for (std::size_t i = 1; i <= a.size(); ++i) {
        row[0] = i;
        for (std::size_t j = 1; j <= b.size(); ++j) {
            const std::size_t replaced = last[j - 1] + (a[i - 1] == b[j - 1] ? 0 : 1);
            row[j] = std::min({last[j] + 1, row[j - 1] + 1, replaced});
            if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1]) {
                row[j] = std::min(row[j], before_last[j - 2] + 1);
            }
        }
        std::swap(before_last, last);
        std::swap(last, row);
    }
    return last[b.size()];
}

std::optional<std::string> nearest(std::string_view word, std::span<const std::string> candidates) {
    if (word.empty() || word.size() > k_longest_word) {
        return std::nullopt;
    }
    std::optional<std::string> best;
    std::size_t best_distance = k_longest_word;
    for (const std::string& candidate : candidates) {
        if (candidate.starts_with(std::string{word} + "_")) {
            return candidate;
        }
        const std::size_t distance = edit_distance(word, candidate);
        if (distance < best_distance && 3 * distance <= std::max(word.size(), candidate.size())) {
            best = candidate;
            best_distance = distance;
        }
    }
    return best;
}

} // namespace sagitta::config
