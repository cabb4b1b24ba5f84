#include "estimator/butterworth.hpp"

#include <cmath>
#include <cstddef>
#include <numbers>

namespace sagitta::estimator {
namespace {

// Both coordinates in one register: the recursion's latency, not its arithmetic, sets the pace.
using Pair = double __attribute__((vector_size(16)));

class Section {
public:
    Section(const LowPass& filter, Pair resting)
        : m_b0{filter.b0, filter.b0}, m_b1{filter.b1, filter.b1}, m_b2{filter.b2, filter.b2},
          m_a1{filter.a1, filter.a1}, m_a2{filter.a2, filter.a2}, m_x1{resting}, m_x2{resting},
          m_y1{resting}, m_y2{resting} {}

    Pair next(Pair x) {
        // Only m_y1 is late; everything else is ready before it.
        const Pair ready = m_b0 * x + m_b1 * m_x1 + m_b2 * m_x2 - m_a2 * m_y2;
        const Pair y = ready - m_a1 * m_y1;
        m_x2 = m_x1;
        m_x1 = x;
        m_y2 = m_y1;
        m_y1 = y;
        return y;
    }

private:
    Pair m_b0, m_b1, m_b2, m_a1, m_a2;
    Pair m_x1, m_x2, m_y1, m_y2;
};

} // namespace

LowPass LowPass::butterworth2(double cutoff_hz, double rate_hz) noexcept {
    const double warped = std::tan(std::numbers::pi * cutoff_hz / rate_hz);
    const double squared = warped * warped;
    const double damped = std::numbers::sqrt2 * warped;
    const double norm = 1.0 / (1.0 + damped + squared);
    const double b0 = squared * norm;
    return {b0, 2.0 * b0, b0, 2.0 * (squared - 1.0) * norm, (1.0 - damped + squared) * norm};
}

double dual_pass_cutoff(double cutoff_hz) noexcept {
    return cutoff_hz / std::sqrt(std::sqrt(std::numbers::sqrt2 - 1.0));
}

void zero_phase(const LowPass& filter, std::span<double> x, std::span<double> y) noexcept {
    const std::size_t n = x.size();
    if (n == 0) {
        return;
    }
    Section forwards{filter, Pair{x[0], y[0]}};
    for (std::size_t i = 0; i < n; ++i) {
        const Pair out = forwards.next(Pair{x[i], y[i]});
        x[i] = out[0];
        y[i] = out[1];
    }
    Section backwards{filter, Pair{x[n - 1], y[n - 1]}};
    for (std::size_t i = n; i-- > 0;) {
        const Pair out = backwards.next(Pair{x[i], y[i]});
        x[i] = out[0];
        y[i] = out[1];
    }
}

} // namespace sagitta::estimator
