#include "estimator/pointer.hpp"

namespace sagitta::estimator {

const char* to_text(PointerKind kind) {
    switch (kind) {
    case PointerKind::mouse:
        return "mouse";
    case PointerKind::trackball:
        return "trackball";
    case PointerKind::pointing_stick:
        return "pointing_stick";
    case PointerKind::touchpad:
        return "touchpad";
    case PointerKind::absolute:
        return "absolute";
    }
    return "unknown";
}

const char* to_text(Origin origin) {
    switch (origin) {
    case Origin::live:
        return "live";
    case Origin::recording:
        return "recording";
    case Origin::simulated:
        return "simulated";
    }
    return "unknown";
}

const char* to_text(CpiSource source) {
    switch (source) {
    case CpiSource::assumed:
        return "assumed";
    case CpiSource::udev:
        return "udev";
    case CpiSource::config:
        return "config";
    case CpiSource::command_line:
        return "command_line";
    case CpiSource::axis_resolution:
        return "axis_resolution";
    }
    return "unknown";
}

} // namespace sagitta::estimator
