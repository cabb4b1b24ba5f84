#include "estimator/movement.hpp"

namespace sagitta::estimator {

std::string_view to_text(Outcome outcome) {
    switch (outcome) {
    case Outcome::scored_click:
        return "scored_click";
    case Outcome::scored_drag:
        return "scored_drag";
    case Outcome::repeat_press:
        return "repeat_press";
    case Outcome::other_button_down:
        return "other_button_down";
    case Outcome::no_motion:
        return "no_motion";
    case Outcome::too_short:
        return "too_short";
    case Outcome::too_slow:
        return "too_slow";
    case Outcome::long_dwell:
        return "long_dwell";
    case Outcome::wandering:
        return "wandering";
    case Outcome::lost_reports:
        return "lost_reports";
    case Outcome::interrupted:
        return "interrupted";
    case Outcome::no_press:
        return "no_press";
    }
    return "unknown";
}

std::string_view explain(Outcome outcome) {
    switch (outcome) {
    case Outcome::scored_click:
        return "scored, ending in a click";
    case Outcome::scored_drag:
        return "scored, a drag";
    case Outcome::repeat_press:
        return "repeat press (double click)";
    case Outcome::other_button_down:
        return "another button was held";
    case Outcome::no_motion:
        return "pressed without moving";
    case Outcome::too_short:
        return "shorter than the minimum distance";
    case Outcome::too_slow:
        return "slower than the maximum movement time";
    case Outcome::long_dwell:
        return "stood still too long before the press";
    case Outcome::wandering:
        return "wandered too long before the press";
    case Outcome::lost_reports:
        return "reports were lost on the way";
    case Outcome::interrupted:
        return "interrupted (pointer gone or recording paused)";
    case Outcome::no_press:
        return "moved without pressing";
    }
    return "unknown";
}

std::string_view to_text(MovementKind kind) {
    return kind == MovementKind::click ? "click" : "drag";
}

std::string_view to_text(Button button) {
    switch (button) {
    case Button::none:
        return "none";
    case Button::left:
        return "left";
    case Button::right:
        return "right";
    case Button::middle:
        return "middle";
    case Button::side:
        return "side";
    case Button::extra:
        return "extra";
    case Button::forward:
        return "forward";
    case Button::back:
        return "back";
    case Button::task:
        return "task";
    }
    return "unknown";
}

} // namespace sagitta::estimator
