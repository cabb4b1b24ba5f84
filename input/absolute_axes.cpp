#include "input/absolute_axes.hpp"

namespace sagitta::input {

namespace {

// Places in k_contact_codes, as bits.
constexpr std::uint32_t k_touch = 1u << 0;
constexpr std::uint32_t k_finger = 1u << 1;
constexpr std::uint32_t k_more_fingers = 0x003cu;
constexpr std::uint32_t k_pen = 0x1fc0u;

/// The bit of a contact code, 0 for any other code.
std::uint32_t contact_bit(std::uint16_t code) {
    for (std::size_t i = 0; i < k_contact_codes.size(); ++i)
        if (k_contact_codes[i] == code)
            return 1u << i;
    return 0;
}

} // namespace

AbsoluteAxes::AbsoluteAxes(estimator::PointerKind kind) : m_kind{kind} {}

void AbsoluteAxes::take_axis(const input_event& event) {
    if (event.code != ABS_X && event.code != ABS_Y)
        return;
    Axis& axis = event.code == ABS_X ? m_x : m_y;
    axis.place = event.value;
    axis.known = true;
    axis.changed = true;
}

bool AbsoluteAxes::take_contact(std::uint16_t code, bool down) {
    const std::uint32_t bit = contact_bit(code);
    if (bit == 0)
        return false;
    m_sends_contacts = true;
    const std::uint32_t before = m_contacts;
    m_contacts = down ? m_contacts | bit : m_contacts & ~bit;
    if (m_contacts == before)
        return true;
    // A pen that hovers and then touches moves on without a jump.
    const bool pen_touches = bit == k_touch && (m_contacts & k_pen) != 0;
    m_new_contact = m_new_contact || !pen_touches;
    return true;
}

bool AbsoluteAxes::moves() const {
    if (m_kind == estimator::PointerKind::touchpad)
        return (m_contacts & k_touch) != 0 && (m_contacts & k_finger) != 0 &&
               (m_contacts & k_more_fingers) == 0;
    return !m_sends_contacts || m_contacts != 0;
}

bool AbsoluteAxes::scrolls() const {
    return m_kind == estimator::PointerKind::touchpad && (m_contacts & k_touch) != 0 &&
           (m_contacts & k_more_fingers) != 0;
}

std::int64_t AbsoluteAxes::Axis::step(bool counts) {
    const std::int64_t moved = counts && known && has_reference ? place - reference : 0;
    reference = place;
    has_reference = counts && known;
    changed = false;
    return moved;
}

AbsoluteAxes::Motion AbsoluteAxes::end_packet() {
    if (m_new_contact) {
        m_x.has_reference = false;
        m_y.has_reference = false;
        m_new_contact = false;
    }
    const bool scrolled = scrolls() && (m_x.changed || m_y.changed);
    const bool counts = moves();
    return Motion{m_x.step(counts), m_y.step(counts), scrolled};
}

void AbsoluteAxes::forget() {
    m_x = Axis{};
    m_y = Axis{};
    m_contacts = 0;
    m_new_contact = false;
}

void AbsoluteAxes::set_contacts(std::span<const std::uint16_t> codes_down) {
    m_contacts = 0;
    for (const std::uint16_t code : codes_down)
        m_contacts |= contact_bit(code);
    m_sends_contacts = m_sends_contacts || m_contacts != 0;
    m_x.has_reference = false;
    m_y.has_reference = false;
}

} // namespace sagitta::input
