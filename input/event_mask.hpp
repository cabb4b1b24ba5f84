// Which codes of a pointer may reach this process.
#pragma once

#include "estimator/pointer.hpp"

#include <array>
#include <cstdint>
#include <linux/input.h>

namespace sagitta::input {

/// Bitmaps as EVIOCSMASK takes them. Whatever is not in them stays in the kernel: key codes other
/// than pointer buttons, scan codes, positions of single fingers.
struct EventMask {
    std::array<std::uint8_t, KEY_CNT / 8> keys{};
    std::array<std::uint8_t, REL_CNT / 8> relative{};
    std::array<std::uint8_t, ABS_CNT / 8> absolute{};
    std::array<std::uint8_t, EV_CNT / 8> types{};
};

[[nodiscard]] EventMask event_mask(estimator::PointerKind kind);

} // namespace sagitta::input
