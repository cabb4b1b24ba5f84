#include "estimator/log_histogram.hpp"

#include <algorithm>
#include <cmath>
#include <numeric>

namespace sagitta::estimator {

void LogHistogram::add(double value) noexcept {
    if (!(value > 1.0)) { // also not-a-number
        ++bins.front();
        return;
    }
    const double position = std::log2(value) * k_bins_per_octave;
    constexpr double last = static_cast<double>(k_bins - 1);
    ++bins[static_cast<std::size_t>(std::min(position, last))];
}

void LogHistogram::merge(const LogHistogram& other) noexcept {
    for (std::size_t bin = 0; bin < k_bins; ++bin) {
        bins[bin] += other.bins[bin];
    }
}

std::uint64_t LogHistogram::count() const noexcept {
    return std::accumulate(bins.begin(), bins.end(), std::uint64_t{0});
}

double LogHistogram::quantile(double p) const noexcept {
    const double wanted = p * static_cast<double>(count());
    double below = 0.0;
    double position = 0.0;
    for (std::size_t bin = 0; bin < k_bins; ++bin) {
        if (bins[bin] == 0) {
            continue;
        }
        const double inside = static_cast<double>(bins[bin]);
        const double share = std::clamp((wanted - below) / inside, 0.0, 1.0);
        position = static_cast<double>(bin) + share;
        below += inside;
        if (below >= wanted) {
            break;
        }
    }
    return std::exp2(position / k_bins_per_octave);
}

} // namespace sagitta::estimator
