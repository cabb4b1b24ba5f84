// Running mean and variance, of one variable or a pair, that merge without loss.
// Source: Chan, Golub & LeVeque (1983), pairwise updating of sums of squares; Welford (1962).
#pragma once

#include <cstdint>

namespace sagitta::estimator {

/// Moments of one variable. All zero when empty.
struct Moments {
    std::uint64_t n = 0;
    double mean = 0.0;
    double m2 = 0.0; ///< sum of squared deviations from the mean

    void add(double value) noexcept;
    void merge(const Moments& other) noexcept;
    /// Sample variance (divisor n - 1). Precondition: n >= 2.
    [[nodiscard]] double variance() const noexcept;
};

/// Moments of a pair (x, y), enough for the regression of y on x.
struct PairMoments {
    std::uint64_t n = 0;
    double mean_x = 0.0;
    double mean_y = 0.0;
    double m2_x = 0.0;
    double m2_y = 0.0;
    double m_xy = 0.0; ///< sum of products of deviations

    void add(double x, double y) noexcept;
    void merge(const PairMoments& other) noexcept;
};

} // namespace sagitta::estimator
