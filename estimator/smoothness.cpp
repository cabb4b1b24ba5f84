#include "estimator/smoothness.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstddef>
#include <numbers>
#include <numeric>
#include <utility>

namespace sagitta::estimator {
namespace {

constexpr double k_highest_hz = 10.0;
constexpr double k_amplitude_threshold = 0.05;
constexpr std::size_t k_padding = 16; // 2^4

/// Magnitudes of a zero-padded discrete Fourier transform, a few neighbouring bins at a time, by
/// Goertzel's recurrence. Only a twentieth of the bins is wanted, so this costs less than a full
/// transform, and needs no table and no memory.
class Spectrum {
public:
    static constexpr std::size_t k_block = 12; // as many as hide the recurrence's latency
    using Block = std::array<double, k_block>;

    Spectrum(std::span<const double> signal, std::size_t padded)
        : m_signal{signal}, m_half_step{std::numbers::pi / static_cast<double>(padded)} {}

    /// Magnitudes of the bins first .. first + k_block - 1.
    [[nodiscard]] Block magnitudes(std::size_t first) const {
        return magnitudes(first, std::make_index_sequence<k_block / 2>{});
    }

private:
    using Pair = double __attribute__((vector_size(16))); // two neighbouring bins

    template <std::size_t... Pairs>
    [[nodiscard]] Block magnitudes(std::size_t first, std::index_sequence<Pairs...>) const {
        // 2 cos(theta) = 2 - 4 sin^2(theta / 2) keeps its digits at small angles, and so does the
        // formula that closes the recurrence.
        const Pair chord[] = {squared_chords(first + 2 * Pairs)...};
        const Pair factor[] = {2.0 - chord[Pairs]...};
        Pair last[sizeof...(Pairs)] = {};
        Pair before[sizeof...(Pairs)] = {};
        for (const double sample : m_signal) {
            const Pair both{sample, sample};
            (advance(last[Pairs], before[Pairs], factor[Pairs], both), ...);
        }
        Block result;
        (store(result, 2 * Pairs, power(last[Pairs], before[Pairs], chord[Pairs])), ...);
        return result;
    }

    [[nodiscard]] Pair squared_chords(std::size_t bin) const {
        const double low = 2.0 * std::sin(m_half_step * static_cast<double>(bin));
        const double high = 2.0 * std::sin(m_half_step * static_cast<double>(bin + 1));
        return Pair{low * low, high * high};
    }
    static void advance(Pair& last, Pair& before, const Pair& factor, const Pair& sample) {
        const Pair now = factor * last + (sample - before);
        before = last;
        last = now;
    }
    [[nodiscard]] static Pair power(const Pair& last, const Pair& before, const Pair& chord) {
        return (last - before) * (last - before) + chord * last * before;
    }
    static void store(Block& block, std::size_t at, const Pair& power) {
        block[at] = std::sqrt(std::max(power[0], 0.0));
        block[at + 1] = std::sqrt(std::max(power[1], 0.0));
    }

    std::span<const double> m_signal;
    double m_half_step;
};

std::size_t padded_size(std::size_t n) {
    std::size_t size = 1;
    while (size < n) {
        size *= 2;
    }
    return size * k_padding;
}

/// Last bin up to `last_bin` with a magnitude of at least `threshold`; 0 when only bin 0 has.
std::size_t last_bin_above(const Spectrum& spectrum, std::size_t last_bin, double threshold) {
    for (std::size_t block = last_bin / Spectrum::k_block + 1; block-- > 0;) {
        const std::size_t first = block * Spectrum::k_block;
        const auto magnitudes = spectrum.magnitudes(first);
        for (std::size_t i = Spectrum::k_block; i-- > 0;) {
            if (first + i <= last_bin && magnitudes[i] >= threshold) {
                return first + i;
            }
        }
    }
    return 0;
}

} // namespace

double spectral_arc_length(std::span<const double> speed, double rate_hz) noexcept {
    const std::size_t padded = padded_size(speed.size());
    const Spectrum spectrum{speed, padded};
    // A speed has its largest magnitude at 0 Hz, its sum.
    const double largest = std::accumulate(speed.begin(), speed.end(), 0.0);
    const auto highest =
        static_cast<std::size_t>(k_highest_hz * static_cast<double>(padded) / rate_hz);
    const std::size_t last = last_bin_above(spectrum, highest, k_amplitude_threshold * largest);
    if (last == 0) {
        return 0.0;
    }
    const double step = 1.0 / static_cast<double>(last);
    double length = 0.0;
    double previous = 1.0;
    for (std::size_t first = 0; first <= last; first += Spectrum::k_block) {
        const auto magnitudes = spectrum.magnitudes(first);
        const std::size_t end = std::min(Spectrum::k_block, last + 1 - first);
        for (std::size_t i = first == 0 ? 1 : 0; i < end; ++i) {
            const double magnitude = magnitudes[i] / largest;
            const double rise = magnitude - previous;
            length += std::sqrt(step * step + rise * rise);
            previous = magnitude;
        }
    }
    return -length;
}

double log_dimensionless_jerk(std::span<const double> speed) noexcept {
    double peak = 0.0;
    for (const double value : speed) {
        peak = std::max(peak, std::abs(value));
    }
    double squares = 0.0;
    for (std::size_t i = 2; i < speed.size(); ++i) {
        const double bend = (speed[i] - speed[i - 1]) - (speed[i - 1] - speed[i - 2]);
        squares += bend * bend;
    }
    const double n = static_cast<double>(speed.size());
    return -std::log(n * n * n / (peak * peak) * squares);
}

} // namespace sagitta::estimator
