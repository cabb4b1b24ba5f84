// What is known of a pointing device before it moves.
#pragma once

#include "estimator/units.hpp"

#include <cstdint>
#include <optional>
#include <string>

namespace sagitta::estimator {

enum class PointerKind : std::uint8_t { mouse, trackball, pointing_stick, touchpad, absolute };
enum class Origin : std::uint8_t { live, recording, simulated };
enum class CpiSource : std::uint8_t { assumed, udev, config, command_line, axis_resolution };

/// Resolution of an absolute device's axes, units/mm, > 0.
struct AxisResolution {
    double x_per_mm;
    double y_per_mm;
};

struct PointerDescription {
    std::string name;
    PointerKind kind = PointerKind::mouse;
    Origin origin = Origin::live;
    std::uint16_t bus = 0;
    std::uint16_t vendor = 0;
    std::uint16_t product = 0;
    std::optional<Cpi> udev_cpi;              ///< from MOUSE_DPI
    std::optional<AxisResolution> resolution; ///< absolute devices only
};

/// "mouse", "trackball", "pointing_stick", "touchpad", "absolute".
[[nodiscard]] const char* to_text(PointerKind kind);
/// "live", "recording", "simulated".
[[nodiscard]] const char* to_text(Origin origin);
/// "assumed", "udev", "config", "command_line", "axis_resolution".
[[nodiscard]] const char* to_text(CpiSource source);

} // namespace sagitta::estimator
