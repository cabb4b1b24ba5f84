// Smoothness of a speed profile.
#pragma once

#include <span>

namespace sagitta::estimator {

/// Spectral arc length (SPARC): minus the arc length of the normalised amplitude spectrum of the
/// speed up to 10 Hz, cut where it last reaches 0.05. Dimensionless, <= 0; nearer to 0 is
/// smoother. 0 when nothing above 0 Hz reaches 0.05.
/// Source: Balasubramanian, Melendez-Calderon, Roby-Brami & Burdet (2015), with zero padding to
/// 2^(ceil(log2 n) + 4) samples. Allocates nothing; its time grows with n^2.
/// @param speed  >= 0, any unit, n >= 2, not all 0;  @param rate_hz  > 20
[[nodiscard]] double spectral_arc_length(std::span<const double> speed, double rate_hz) noexcept;

/// Log dimensionless jerk (LDLJ) of a speed profile: -ln(T^3 / v_peak^2 * sum |second difference of
/// speed / dt^2|^2 dt), T = n dt. The interval dt cancels, so it is no argument.
/// Source: Balasubramanian et al. (2015), peak-speed form.
/// @param speed  n >= 3, equally spaced, peak > 0; +infinity when its second differences are all 0
[[nodiscard]] double log_dimensionless_jerk(std::span<const double> speed) noexcept;

} // namespace sagitta::estimator
