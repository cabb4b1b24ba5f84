#include "input/event_mask.hpp"

#include "input/absolute_axes.hpp"

#include <initializer_list>

namespace sagitta::input {

namespace {

template <std::size_t Bytes>
void allow(std::array<std::uint8_t, Bytes>& bits, std::size_t code) {
    bits[code / 8] = static_cast<std::uint8_t>(bits[code / 8] | 1u << code % 8);
}

} // namespace

EventMask event_mask(estimator::PointerKind kind) {
    EventMask mask;
    for (const std::size_t type : std::initializer_list<std::size_t>{EV_SYN, EV_KEY, EV_REL})
        allow(mask.types, type);
    for (std::size_t code = BTN_LEFT; code <= BTN_TASK; ++code)
        allow(mask.keys, code);
    for (const std::size_t code : std::initializer_list<std::size_t>{
             REL_X, REL_Y, REL_WHEEL, REL_HWHEEL, REL_WHEEL_HI_RES, REL_HWHEEL_HI_RES})
        allow(mask.relative, code);
    using estimator::PointerKind;
    if (kind != PointerKind::touchpad && kind != PointerKind::absolute)
        return mask;
    allow(mask.types, EV_ABS);
    allow(mask.absolute, ABS_X);
    allow(mask.absolute, ABS_Y);
    for (const std::size_t code : k_contact_codes)
        allow(mask.keys, code);
    if (kind == PointerKind::absolute) {
        allow(mask.keys, BTN_STYLUS);
        allow(mask.keys, BTN_STYLUS2);
    }
    return mask;
}

} // namespace sagitta::input
