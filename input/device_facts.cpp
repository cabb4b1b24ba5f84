#include "input/device_facts.hpp"

#include <charconv>

namespace sagitta::input {

namespace {

using estimator::PointerKind;

bool is_marked(const DeviceFacts& facts, std::string_view mark) {
    const auto found = facts.properties.find(mark);
    return found != facts.properties.end() && found->second == "1";
}

bool moves_relatively(const Capabilities& can) {
    return can.relative[REL_X] && can.relative[REL_Y];
}

bool moves_absolutely(const Capabilities& can) {
    return can.absolute[ABS_X] && can.absolute[ABS_Y];
}

std::optional<PointerKind> kind_by_marks(const DeviceFacts& facts) {
    if (is_marked(facts, "ID_INPUT_TABLET_PAD"))
        return std::nullopt;
    if (is_marked(facts, "ID_INPUT_TOUCHPAD"))
        return PointerKind::touchpad;
    if (is_marked(facts, "ID_INPUT_POINTINGSTICK"))
        return PointerKind::pointing_stick;
    if (is_marked(facts, "ID_INPUT_TRACKBALL"))
        return PointerKind::trackball;
    if (is_marked(facts, "ID_INPUT_TABLET") || is_marked(facts, "ID_INPUT_TOUCHSCREEN"))
        return PointerKind::absolute;
    if (!is_marked(facts, "ID_INPUT_MOUSE"))
        return std::nullopt;
    // The mouse of a virtual machine is marked as a mouse and sends places.
    const bool only_places = moves_absolutely(facts.can) && !moves_relatively(facts.can);
    return only_places ? PointerKind::absolute : PointerKind::mouse;
}

std::optional<PointerKind> kind_by_capability(const Capabilities& can) {
    if (can.properties[INPUT_PROP_ACCELEROMETER])
        return std::nullopt;
    if (moves_relatively(can) && can.properties[INPUT_PROP_POINTING_STICK])
        return PointerKind::pointing_stick;
    if (moves_relatively(can) && can.keys[BTN_LEFT])
        return PointerKind::mouse;
    if (!moves_absolutely(can))
        return std::nullopt;
    const bool has_pen = can.keys[BTN_TOOL_PEN] || can.keys[BTN_STYLUS];
    const bool direct = can.properties[INPUT_PROP_DIRECT];
    if (can.keys[BTN_TOOL_FINGER] && !has_pen && !direct)
        return PointerKind::touchpad;
    const bool joystick = can.keys[BTN_TRIGGER] || can.keys[BTN_SOUTH];
    if (has_pen || can.keys[BTN_LEFT] || (can.keys[BTN_TOUCH] && !joystick))
        return PointerKind::absolute;
    return std::nullopt;
}

std::optional<double> parse_number(std::string_view text) {
    std::uint32_t value = 0;
    const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
    if (error != std::errc{} || end != text.data() + text.size() || value == 0)
        return std::nullopt;
    return static_cast<double>(value);
}

/// Length of the valid UTF-8 sequence at the start of `text`, 0 if there is none.
std::size_t utf8_length(std::string_view text) {
    const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
    const unsigned char first = byte(0);
    std::size_t length = 0;
    if (first < 0x80)
        return 1;
    if (first >= 0xc2 && first <= 0xdf)
        length = 2;
    else if (first >= 0xe0 && first <= 0xef)
        length = 3;
    else if (first >= 0xf0 && first <= 0xf4)
        length = 4;
    if (length == 0 || text.size() < length)
        return 0;
    for (std::size_t i = 1; i < length; ++i)
        if ((byte(i) & 0xc0) != 0x80)
            return 0;
    const unsigned char second = byte(1);
    const bool overlong = (first == 0xe0 && second < 0xa0) || (first == 0xf0 && second < 0x90);
    const bool beyond = (first == 0xed && second > 0x9f) || (first == 0xf4 && second > 0x8f);
    return overlong || beyond ? 0 : length;
}

} // namespace

std::optional<estimator::PointerDescription> describe(const DeviceFacts& facts,
                                                      estimator::Origin origin) {
    const bool is_judged_by_udev = is_marked(facts, "ID_INPUT");
    const auto kind = is_judged_by_udev ? kind_by_marks(facts) : kind_by_capability(facts.can);
    if (!kind)
        return std::nullopt;
    estimator::PointerDescription pointer;
    pointer.name = clean_name(facts.name);
    pointer.kind = *kind;
    pointer.origin = origin;
    pointer.bus = facts.bus;
    pointer.vendor = facts.vendor;
    pointer.product = facts.product;
    if (const auto dpi = facts.properties.find("MOUSE_DPI"); dpi != facts.properties.end())
        pointer.udev_cpi = parse_mouse_dpi(dpi->second);
    if (*kind == PointerKind::touchpad || *kind == PointerKind::absolute)
        pointer.resolution = facts.resolution;
    return pointer;
}

bool is_keyboard(const DeviceFacts& facts) {
    if (is_marked(facts, "ID_INPUT_KEYBOARD"))
        return true;
    for (std::size_t key = KEY_ESC; key < 32; ++key)
        if (!facts.can.keys[key])
            return false;
    return true;
}

std::optional<estimator::Cpi> parse_mouse_dpi(std::string_view text) {
    constexpr std::string_view k_blank = " \t";
    std::optional<double> marked;
    std::optional<double> single;
    std::size_t items = 0;
    while (true) {
        const std::size_t start = text.find_first_not_of(k_blank);
        if (start == std::string_view::npos)
            break;
        text.remove_prefix(start);
        std::string_view item = text.substr(0, text.find_first_of(k_blank));
        text.remove_prefix(item.size());
        ++items;
        const bool is_default = item.front() == '*';
        if (is_default)
            item.remove_prefix(1);
        if (const std::size_t at = item.find('@'); at != std::string_view::npos) {
            if (!parse_number(item.substr(at + 1)))
                return std::nullopt;
            item = item.substr(0, at);
        }
        const std::optional<double> value = parse_number(item);
        if (!value || (is_default && marked && *marked != *value))
            return std::nullopt;
        single = value;
        if (is_default)
            marked = value;
    }
    if (marked)
        return estimator::Cpi::of(*marked);
    if (items == 1)
        return estimator::Cpi::of(*single);
    return std::nullopt;
}

std::string clean_name(std::string_view raw) {
    constexpr std::size_t k_longest = 128;
    std::string name;
    while (!raw.empty()) {
        const std::size_t length = utf8_length(raw);
        const bool is_control =
            length == 1 && (static_cast<unsigned char>(raw[0]) < 0x20 || raw[0] == 0x7f);
        const std::string_view piece =
            length == 0 || is_control ? std::string_view{"?"} : raw.substr(0, length);
        if (name.size() + piece.size() > k_longest)
            break;
        name += piece;
        raw.remove_prefix(length == 0 ? 1 : length);
    }
    const std::size_t first = name.find_first_not_of(' ');
    if (first == std::string::npos)
        return "unnamed pointer";
    return name.substr(first, name.find_last_not_of(' ') - first + 1);
}

} // namespace sagitta::input
