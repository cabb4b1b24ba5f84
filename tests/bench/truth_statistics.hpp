// Correlations over people.
#pragma once

#include <span>

namespace sagitta::bench {

/// Pearson's correlation. @param x, y  equal length >= 2; 0 when either does not vary
[[nodiscard]] double correlation(std::span<const double> x, std::span<const double> y);
/// Spearman's rank correlation; ties share their mean rank.
[[nodiscard]] double rank_correlation(std::span<const double> x, std::span<const double> y);

} // namespace sagitta::bench
