// From a pointer's counts to the two planes: mm of the hand and px of the screen.
#pragma once

#include "estimator/gain.hpp"
#include "estimator/pointer.hpp"

namespace sagitta::estimator {

/// CPI taken when neither the config nor udev knows it; such scores carry Flag::cpi_assumed.
constexpr Cpi k_assumed_cpi = Cpi::of(1000.0);

struct Calibration {
    double mm_per_count_x;
    double mm_per_count_y;
    double px_per_count_x; ///< at gain factor 1
    double px_per_count_y;
    Gain gain;
    Cpi cpi;
    CpiSource cpi_source;
};

/// CPI by precedence: `override_cpi` (from the config or the command line), the axis resolution
/// of an absolute device, udev's MOUSE_DPI, else k_assumed_cpi.
///
/// A relative pointer's px are counts x gain. An absolute device's units are first brought to
/// k_assumed_cpi, so that a touchpad's fine units do not count as px.
///
/// Some desktops bring the counts of finer pointers down to a common resolution N before they
/// accelerate them (`gain_normalised_to`), and know of the pointer's resolution what udev says. A
/// table made for such a desktop gets its speeds and counts brought to N the same way. Source:
/// published documentation of a desktop input library: devices of N or more are normalised to N,
/// slower ones are not.
/// @param override_cpi     > 0 when given
/// @param override_source  CpiSource::config or CpiSource::command_line
/// @param gain_normalised_to  N, > 0 when given; a flat gain takes no notice of it
[[nodiscard]] Calibration calibrate(const PointerDescription& pointer,
                                    std::optional<Cpi> override_cpi, CpiSource override_source,
                                    Gain gain, std::optional<Cpi> gain_normalised_to = {});

} // namespace sagitta::estimator
