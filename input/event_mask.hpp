// Which codes of a pointer may reach this process.
#pragma once

#include "estimator/pointer.hpp"

#include <array>
#include <cstddef>
#include <linux/input.h>

namespace sagitta::input {

/// Bytes of a bitmap of so many codes: whole longs, or the kernel refuses it (EINVAL).
[[nodiscard]] constexpr std::size_t mask_bytes(std::size_t codes) {
    constexpr std::size_t k_bits_per_long = 8 * sizeof(long);
    return (codes + k_bits_per_long - 1) / k_bits_per_long * sizeof(long);
}

/// A bitmap of the kernel: whole longs, or EVIOCSMASK refuses it (linux, drivers/input/evdev.c,
/// bits_from_user).
template <std::size_t Codes>
class CodeBits {
public:
    void allow(std::size_t code) { m_words[code / k_bits] |= 1ul << code % k_bits; }
    [[nodiscard]] bool has(std::size_t code) const {
        return (m_words[code / k_bits] >> code % k_bits & 1ul) != 0;
    }
    [[nodiscard]] const unsigned long* data() const { return m_words.data(); }
    [[nodiscard]] unsigned long* data() { return m_words.data(); }
    static constexpr std::size_t bytes() { return sizeof m_words; }

private:
    static constexpr std::size_t k_bits = 8 * sizeof(unsigned long);
    std::array<unsigned long, (Codes + k_bits - 1) / k_bits> m_words{};
};

/// What may pass, by type. Whatever is not in it stays in the kernel: key codes other than pointer
/// buttons, scan codes, places of single fingers.
struct EventMask {
    CodeBits<EV_CNT> types;
    CodeBits<KEY_CNT> keys;
    CodeBits<REL_CNT> relative;
    CodeBits<ABS_CNT> absolute;
};

[[nodiscard]] EventMask event_mask(estimator::PointerKind kind);

} // namespace sagitta::input
