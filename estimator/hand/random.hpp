// Seeded random numbers that are the same with every compiler and standard library.
#pragma once

#include <cstdint>
#include <random>

namespace sagitta::estimator::hand {

/// Draws from one stream. The generator is std::mt19937_64, which the language fixes bit for bit;
/// the transforms are our own, because those of the standard library differ between its makers.
class Random {
public:
    /// @param stream  streams of one seed are independent of each other
    explicit Random(std::uint64_t seed, std::uint64_t stream = 0);

    /// [0, 1), 53 bits.
    [[nodiscard]] double uniform() noexcept {
        return static_cast<double>(m_engine() >> 11U) * 0x1.0p-53;
    }
    /// [low, high).
    [[nodiscard]] double uniform(double low, double high) noexcept {
        return low + (high - low) * uniform();
    }
    /// True with probability `p`.
    [[nodiscard]] bool chance(double p) noexcept { return uniform() < p; }
    /// Standard normal, by the polar method. Source: Marsaglia & Bray (1964).
    [[nodiscard]] double normal() noexcept;
    /// exp(N(ln median, log_sd)): its median is `median`.
    [[nodiscard]] double log_normal(double median, double log_sd) noexcept;
    /// A whole number in [0, n). @param n  >= 1
    [[nodiscard]] std::uint64_t below(std::uint64_t n) noexcept;

private:
    std::mt19937_64 m_engine;
    double m_spare = 0.0;
    bool m_has_spare = false;
};

} // namespace sagitta::estimator::hand
