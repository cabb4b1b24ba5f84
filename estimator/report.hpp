// One packet of a pointer, ended by SYN_REPORT: the common currency of live pointers, recordings
// and the simulated hand. Everything after this type is the same for all three.
#pragma once

#include "estimator/units.hpp"

#include <cstdint>
#include <vector>

namespace sagitta::estimator {

/// A pointer's place in its session's list of pointers; it indexes ReportSource::pointers().
enum class PointerIndex : std::uint8_t {};
constexpr std::size_t k_max_pointers = 256;

/// Buttons as bits, so that a packet can hold several edges.
enum class Button : std::uint8_t {
    none = 0,
    left = 1 << 0,
    right = 1 << 1,
    middle = 1 << 2,
    side = 1 << 3,
    extra = 1 << 4,
    forward = 1 << 5,
    back = 1 << 6,
    task = 1 << 7
};
using ButtonSet = std::uint8_t;

struct Report {
    PointerTime time{};
    std::int32_t dx = 0; ///< counts, + = right
    std::int32_t dy = 0; ///< counts, + = towards the person (the kernel's sign)
    /// Wheel motion of all wheels together, in 1/120 of a detent, without sign.
    std::uint16_t wheel_120ths = 0;
    ButtonSet pressed = 0;
    ButtonSet released = 0;
    PointerIndex pointer{};
    /// Reports before this one were lost (kernel buffer overrun, a reversed or broken stamp).
    bool after_loss = false;
};
static_assert(sizeof(Report) == 24, "reports are buffered by the thousand");

using ReportBatch = std::vector<Report>;

} // namespace sagitta::estimator
