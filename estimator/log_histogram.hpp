// Counts in bins of equal ratio, for quantiles of positive quantities over any stretch of time.
#pragma once

#include <array>
#include <cstddef>
#include <cstdint>

namespace sagitta::estimator {

/// 128 bins, 8 an octave (each 9 % wide), from 1 to 65536 in the quantity's own unit; values
/// outside count in the first or last bin.
class LogHistogram {
public:
    static constexpr std::size_t k_bins = 128;
    static constexpr int k_bins_per_octave = 8;

    void add(double value) noexcept;
    void merge(const LogHistogram& other) noexcept;
    [[nodiscard]] std::uint64_t count() const noexcept;
    /// Value below which the share `p` of the counts lies, interpolated within its bin on the log
    /// scale. @param p  [0, 1]. Precondition: count() > 0.
    [[nodiscard]] double quantile(double p) const noexcept;

    std::array<std::uint32_t, k_bins> bins{};
};

} // namespace sagitta::estimator
