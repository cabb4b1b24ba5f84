#include "input/packet.hpp"

#include <algorithm>
#include <limits>

namespace sagitta::input {

namespace {

using estimator::Button;
using estimator::ButtonSet;
using estimator::PointerKind;
using estimator::Report;

constexpr std::uint32_t what(std::uint16_t type, std::uint16_t code) {
    return static_cast<std::uint32_t>(type) | static_cast<std::uint32_t>(code) << 16;
}

bool is_stamp(const input_event& event) {
    return static_cast<std::uint64_t>(event.input_event_sec) <
               static_cast<std::uint64_t>(k_seconds_end) &&
           static_cast<std::uint64_t>(event.input_event_usec) < 1'000'000;
}

/// Precondition: is_stamp(event).
std::int64_t stamp_us(const input_event& event) {
    return static_cast<std::int64_t>(event.input_event_sec) * 1'000'000 +
           static_cast<std::int64_t>(event.input_event_usec);
}

bool is_possible(std::int64_t delta) {
    return delta >= -k_max_delta && delta <= k_max_delta;
}

ButtonSet button_of(std::uint16_t code, PointerKind kind) {
    if (code >= BTN_LEFT && code <= BTN_TASK)
        return static_cast<ButtonSet>(1u << (code - BTN_LEFT));
    if (kind != PointerKind::absolute)
        return 0;
    switch (code) {
    case BTN_TOUCH:
        return static_cast<ButtonSet>(Button::left);
    case BTN_STYLUS:
        return static_cast<ButtonSet>(Button::right);
    case BTN_STYLUS2:
        return static_cast<ButtonSet>(Button::middle);
    default:
        return 0;
    }
}

std::int64_t magnitude(std::int64_t value) {
    return value < 0 ? -value : value;
}

} // namespace

static_assert(BTN_TASK - BTN_LEFT == 7 && static_cast<int>(Button::task) == 1 << 7,
              "button bits follow the kernel's codes");

PacketAssembler::PacketAssembler(estimator::PointerIndex pointer, PointerKind kind)
    : m_pointer{pointer}, m_kind{kind}, m_last_us{std::numeric_limits<std::int64_t>::min()} {
    if (kind == PointerKind::touchpad || kind == PointerKind::absolute) {
        m_axes.emplace(kind);
        m_plain = false;
    }
}

// The loop that every event of a recording passes: motion and the end of plain packets are
// handled in registers, all else out of line.
void PacketAssembler::add(std::span<const input_event> events, estimator::ReportBatch& batch) {
    if (events.empty())
        return;
    std::int64_t dx = m_dx;
    std::int64_t dy = m_dy;
    for (const input_event& event : events) {
        const std::uint32_t event_is = what(event.type, event.code);
        if (event_is == what(EV_REL, REL_X)) {
            dx += event.value;
        } else if (event_is == what(EV_REL, REL_Y)) {
            dy += event.value;
        } else if (event_is == what(EV_SYN, SYN_REPORT)) {
            if (m_plain && is_stamp(event) && stamp_us(event) >= m_last_us && is_possible(dx) &&
                is_possible(dy)) {
                const std::int64_t now_us = stamp_us(event);
                m_last_us = now_us;
                if ((dx | dy) != 0)
                    batch.push_back({.time = estimator::PointerTime{estimator::Micros{now_us}},
                                     .dx = static_cast<std::int32_t>(dx),
                                     .dy = static_cast<std::int32_t>(dy),
                                     .pointer = m_pointer});
            } else {
                finish(event, dx, dy, batch);
            }
            dx = 0;
            dy = 0;
        } else {
            take_other(event);
        }
    }
    m_dx = dx;
    m_dy = dy;
    const input_event& last = events.back();
    m_mid_packet = what(last.type, last.code) != what(EV_SYN, SYN_REPORT);
}

void PacketAssembler::lose() {
    m_ignoring = true;
    m_lost = true;
    m_plain = false;
    if (m_axes)
        m_axes->forget();
}

void PacketAssembler::set_contacts(std::span<const std::uint16_t> codes_down) {
    if (m_axes)
        m_axes->set_contacts(codes_down);
}

void PacketAssembler::take_other(const input_event& event) {
    switch (event.type) {
    case EV_SYN:
        if (event.code == SYN_DROPPED) {
            ++m_drops;
            lose();
        }
        return;
    case EV_REL: {
        const bool vertical = event.code == REL_WHEEL || event.code == REL_WHEEL_HI_RES;
        if (!vertical && event.code != REL_HWHEEL && event.code != REL_HWHEEL_HI_RES)
            return;
        Wheel& wheel = vertical ? m_vertical : m_horizontal;
        if (event.code == REL_WHEEL || event.code == REL_HWHEEL) {
            wheel.steps += event.value;
        } else {
            wheel.hi_res += event.value;
            wheel.has_hi_res = true;
        }
        m_plain = false;
        return;
    }
    case EV_KEY:
        take_key(event);
        return;
    case EV_ABS:
        if (m_axes && !m_ignoring)
            m_axes->take_axis(event);
        return;
    default:
        return;
    }
}

void PacketAssembler::take_key(const input_event& event) {
    if ((event.value != 0 && event.value != 1) || m_ignoring)
        return;
    const bool down = event.value == 1;
    if (m_axes)
        m_axes->take_contact(event.code, down);
    const ButtonSet button = button_of(event.code, m_kind);
    if (button == 0)
        return;
    ButtonSet& edges = down ? m_pressed : m_released;
    edges = static_cast<ButtonSet>(edges | button);
    m_plain = false;
}

std::int64_t PacketAssembler::Wheel::in_120ths() const {
    constexpr std::int64_t k_most = std::numeric_limits<std::uint16_t>::max();
    return has_hi_res ? std::min(magnitude(hi_res), k_most)
                      : std::min(magnitude(steps), k_most) * 120;
}

/// Ends a packet that is more than plain motion.
void PacketAssembler::finish(const input_event& end, std::int64_t dx, std::int64_t dy,
                             estimator::ReportBatch& batch) {
    if (m_ignoring) {
        m_ignoring = false;
        start_packet();
        return;
    }
    std::int64_t wheel = m_vertical.in_120ths() + m_horizontal.in_120ths();
    if (m_axes) {
        const AbsoluteAxes::Motion motion = m_axes->end_packet();
        dx += motion.dx;
        dy += motion.dy;
        wheel += motion.scrolled ? 1 : 0;
    }
    if (!is_stamp(end)) {
        ++m_reversed;
        m_lost = true;
        start_packet();
        return;
    }
    const std::int64_t now_us = stamp_us(end);
    if (now_us < m_last_us) {
        ++m_reversed;
        m_lost = true;
    }
    m_last_us = now_us;
    if (!is_possible(dx) || !is_possible(dy)) {
        ++m_impossible;
        m_lost = true;
        dx = 0;
        dy = 0;
    }
    if ((dx | dy | wheel) != 0 || (m_pressed | m_released) != 0) {
        constexpr std::int64_t k_most = std::numeric_limits<std::uint16_t>::max();
        batch.push_back({.time = estimator::PointerTime{estimator::Micros{now_us}},
                         .dx = static_cast<std::int32_t>(dx),
                         .dy = static_cast<std::int32_t>(dy),
                         .wheel_120ths = static_cast<std::uint16_t>(std::min(wheel, k_most)),
                         .pressed = m_pressed,
                         .released = m_released,
                         .pointer = m_pointer,
                         .after_loss = m_lost});
        m_lost = false;
    }
    start_packet();
}

void PacketAssembler::start_packet() {
    m_vertical = Wheel{};
    m_horizontal = Wheel{};
    m_pressed = 0;
    m_released = 0;
    m_plain = !m_lost && !m_axes;
}

} // namespace sagitta::input
