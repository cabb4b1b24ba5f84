// The parts of an hour that are kept as bytes: histograms and sectors. The layout is part of the
// on-disk format; numbers are little-endian base-128 varints and 64-bit doubles.
#pragma once

#include "estimator/hour_summary.hpp"

#include <cstddef>
#include <optional>
#include <span>
#include <vector>

namespace sagitta::store {

using Bytes = std::vector<std::byte>;
using Sectors = std::array<estimator::SectorSummary, estimator::k_sectors>;

/// Layout 1: the byte 1, then for each bin with counts: bins skipped since the last one, count.
[[nodiscard]] Bytes encode(const estimator::LogHistogram& histogram);
/// @return nothing when the bytes are not such a histogram
[[nodiscard]] std::optional<estimator::LogHistogram>
decode_histogram(std::span<const std::byte> bytes);

/// Layout 1: the byte 1, then for each sector the moments of offset share and of initial angle:
/// n, and when n > 0 the mean and the sum of squared deviations.
[[nodiscard]] Bytes encode(const Sectors& sectors);
/// @return nothing when the bytes are not such sectors
[[nodiscard]] std::optional<Sectors> decode_sectors(std::span<const std::byte> bytes);

} // namespace sagitta::store
