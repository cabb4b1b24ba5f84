// What a device says it can do and what udev says of it, and what kind of pointer that makes it.
#pragma once

#include "estimator/pointer.hpp"

#include <array>
#include <bitset>
#include <cstdint>
#include <linux/input.h>
#include <map>
#include <optional>
#include <string>
#include <string_view>

namespace sagitta::input {

/// Codes that a device can send, by type; types that no pointer needs are left out.
struct Capabilities {
    std::bitset<KEY_CNT> keys;
    std::bitset<REL_CNT> relative;
    std::bitset<ABS_CNT> absolute;
    std::bitset<INPUT_PROP_CNT> properties;
};

/// udev's properties of a device, e.g. ID_INPUT_MOUSE=1 and MOUSE_DPI=800@125.
using UdevProperties = std::map<std::string, std::string, std::less<>>;

struct DeviceFacts {
    std::string name;
    std::uint16_t bus = 0;
    std::uint16_t vendor = 0;
    std::uint16_t product = 0;
    Capabilities can;
    UdevProperties properties; ///< empty where no udev runs
    std::optional<estimator::AxisResolution> resolution;
};

/// The pointer that the facts describe, by udev's ID_INPUT_* marks if there are any, else by
/// capability; nothing for a device that is no pointer.
[[nodiscard]] std::optional<estimator::PointerDescription> describe(const DeviceFacts& facts,
                                                                    estimator::Origin origin);

/// The device can type text: marked ID_INPUT_KEYBOARD by udev, or with all keys from Esc to D
/// (udev's own rule, systemd udev-builtin-input_id.c, from memory).
[[nodiscard]] bool is_keyboard(const DeviceFacts& facts);

/// The default resolution of a MOUSE_DPI property: a value, or a list whose default is marked *,
/// each with an optional @Hz, e.g. "400 *800 2000" or "1000@125". Source: udev 70-mouse.hwdb.
/// @return nothing when the text does not follow that grammar
[[nodiscard]] std::optional<estimator::Cpi> parse_mouse_dpi(std::string_view text);

/// A name fit to print and store: valid UTF-8 without control characters, at most 128 bytes,
/// never empty.
[[nodiscard]] std::string clean_name(std::string_view raw);

} // namespace sagitta::input
