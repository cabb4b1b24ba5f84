#include "estimator/hand/random.hpp"

#include <cmath>

namespace sagitta::estimator::hand {

namespace {

/// Spreads a seed over 64 bits, so that neighbouring seeds and streams give unlike generators.
/// Source: Steele, Lea & Flood (2014), SplitMix64.
std::uint64_t mixed(std::uint64_t value) {
    value += 0x9E3779B97F4A7C15U;
    value = (value ^ (value >> 30U)) * 0xBF58476D1CE4E5B9U;
    value = (value ^ (value >> 27U)) * 0x94D049BB133111EBU;
    return value ^ (value >> 31U);
}

} // namespace

Random::Random(std::uint64_t seed, std::uint64_t stream) : m_engine{mixed(seed ^ mixed(stream))} {}

double Random::normal() noexcept {
    if (m_has_spare) {
        m_has_spare = false;
        return m_spare;
    }
    double u = 0.0;
    double v = 0.0;
    double square = 0.0;
    do {
        u = uniform(-1.0, 1.0);
        v = uniform(-1.0, 1.0);
        square = u * u + v * v;
    } while (square >= 1.0 || square == 0.0);
    const double factor = std::sqrt(-2.0 * std::log(square) / square);
    m_spare = v * factor;
    m_has_spare = true;
    return u * factor;
}

double Random::log_normal(double median, double log_sd) noexcept {
    return median * std::exp(log_sd * normal());
}

std::uint64_t Random::below(std::uint64_t n) noexcept {
    return static_cast<std::uint64_t>(uniform() * static_cast<double>(n));
}

} // namespace sagitta::estimator::hand
