// Motion of devices that report places instead of steps: touchpads, touch screens, pens and the
// absolute mice of virtual machines.
#pragma once

#include "estimator/pointer.hpp"

#include <array>
#include <cstdint>
#include <linux/input.h>
#include <span>

namespace sagitta::input {

/// Codes that tell of contact: one finger, two to five, pens and what else tablets know.
constexpr std::array<std::uint16_t, 13> k_contact_codes{
    BTN_TOUCH,         BTN_TOOL_FINGER, BTN_TOOL_DOUBLETAP, BTN_TOOL_TRIPLETAP, BTN_TOOL_QUADTAP,
    BTN_TOOL_QUINTTAP, BTN_TOOL_PEN,    BTN_TOOL_RUBBER,    BTN_TOOL_BRUSH,     BTN_TOOL_PENCIL,
    BTN_TOOL_AIRBRUSH, BTN_TOOL_MOUSE,  BTN_TOOL_LENS};

/// Turns ABS_X and ABS_Y into steps, in device units.
///
/// The kernel sends an axis only when it changes (Documentation/input/event-codes.rst), so the
/// last place is kept. A new contact starts from a new reference: lifting and setting down
/// elsewhere is no motion.
/// - touchpad: motion counts while exactly one finger touches; with more fingers it is scrolling.
///   A finger that only hovers does not count.
/// - absolute: motion counts while the pen is near or the screen is touched; a device without
///   contact events (an absolute mouse) always counts.
class AbsoluteAxes {
public:
    explicit AbsoluteAxes(estimator::PointerKind kind);

    struct Motion {
        std::int64_t dx, dy;
        bool scrolled; ///< two or more fingers moved
    };

    void take_axis(const input_event& event);
    /// @return whether the code says something about contact (BTN_TOUCH, BTN_TOOL_*)
    bool take_contact(std::uint16_t code, bool down);
    /// Ends the packet: the motion since the last one.
    [[nodiscard]] Motion end_packet();
    /// Events were lost: neither place nor contact is known any more.
    void forget();
    /// What the kernel says is down, after forget() or at the start.
    void set_contacts(std::span<const std::uint16_t> codes_down);

private:
    struct Axis {
        std::int64_t place = 0, reference = 0;
        bool known = false, has_reference = false, changed = false;
        std::int64_t step(bool counts);
    };
    [[nodiscard]] bool moves() const;
    [[nodiscard]] bool scrolls() const;

    estimator::PointerKind m_kind;
    Axis m_x, m_y;
    std::uint32_t m_contacts = 0;  ///< a bit for each of k_contact_codes
    bool m_sends_contacts = false; ///< seen at least once
    bool m_new_contact = false;    ///< within this packet
};

} // namespace sagitta::input
