// Which codes of a pointer may reach this process.
#pragma once

#include "estimator/pointer.hpp"

#include <array>
#include <cstddef>
#include <cstdint>
#include <linux/input.h>

namespace sagitta::input {

/// Bytes of a bitmap of so many codes: whole longs, or the kernel refuses it (EINVAL).
[[nodiscard]] constexpr std::size_t mask_bytes(std::size_t codes) {
    constexpr std::size_t k_bits_per_long = 8 * sizeof(long);
    return (codes + k_bits_per_long - 1) / k_bits_per_long * sizeof(long);
}

/// Bitmaps as EVIOCSMASK takes them. Whatever is not in them stays in the kernel: key codes other
/// than pointer buttons, scan codes, positions of single fingers.
struct EventMask {
    std::array<std::uint8_t, mask_bytes(KEY_CNT)> keys{};
    std::array<std::uint8_t, mask_bytes(REL_CNT)> relative{};
    std::array<std::uint8_t, mask_bytes(ABS_CNT)> absolute{};
    std::array<std::uint8_t, mask_bytes(EV_CNT)> types{};
};

[[nodiscard]] EventMask event_mask(estimator::PointerKind kind);

} // namespace sagitta::input
