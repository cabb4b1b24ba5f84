#include "input/event_mask.hpp"

#include "input/absolute_axes.hpp"

#include <initializer_list>

namespace sagitta::input {

EventMask event_mask(estimator::PointerKind kind) {
    EventMask mask;
    for (const std::size_t type : std::initializer_list<std::size_t>{EV_SYN, EV_KEY, EV_REL})
        mask.types.allow(type);
    for (std::size_t code = BTN_LEFT; code <= BTN_TASK; ++code)
        mask.keys.allow(code);
    for (const std::size_t code : std::initializer_list<std::size_t>{
             REL_X, REL_Y, REL_WHEEL, REL_HWHEEL, REL_WHEEL_HI_RES, REL_HWHEEL_HI_RES})
        mask.relative.allow(code);
    using estimator::PointerKind;
    if (kind != PointerKind::touchpad && kind != PointerKind::absolute)
        return mask;
    mask.types.allow(EV_ABS);
    mask.absolute.allow(ABS_X);
    mask.absolute.allow(ABS_Y);
    for (const std::size_t code : k_contact_codes)
        mask.keys.allow(code);
    if (kind == PointerKind::absolute) {
        mask.keys.allow(BTN_STYLUS);
        mask.keys.allow(BTN_STYLUS2);
    }
    return mask;
}

} // namespace sagitta::input
