// Second-order Butterworth low-pass, applied forwards and backwards so that it delays nothing.
#pragma once

#include <span>

namespace sagitta::estimator {

/// One second-order section: y[i] = b0 x[i] + b1 x[i-1] + b2 x[i-2] - a1 y[i-1] - a2 y[i-2].
struct LowPass {
    double b0, b1, b2, a1, a2;

    /// Bilinear transform of the analogue filter, pre-warped: -3 dB at the cutoff in one pass, unit
    /// gain at rest. Common practice, no source.
    /// @param cutoff_hz  (0, rate_hz / 2);  @param rate_hz  samples a second
    [[nodiscard]] static LowPass butterworth2(double cutoff_hz, double rate_hz) noexcept;
};

/// The single-pass cutoff that leaves -3 dB at `cutoff_hz` after a forward and a backward pass,
/// cutoff / (sqrt(2) - 1)^(1/4). It holds for the analogue filter; at a cutoff of a twentieth of
/// the rate the bilinear transform moves the -3 dB point by 0.5 %.
/// Common practice, no source; follows from |H|^4 = 1/2.
[[nodiscard]] double dual_pass_cutoff(double cutoff_hz) noexcept;

/// Filters two coordinates of one path in place, forwards then backwards: no phase shift, twice the
/// attenuation of one pass. Each pass starts as if its first sample had stood for ever, so a caller
/// who wants the ends undisturbed pads them by rest. Allocates nothing.
/// @param x, y  equal length, any unit; empty is allowed
void zero_phase(const LowPass& filter, std::span<double> x, std::span<double> y) noexcept;

} // namespace sagitta::estimator
