// From kernel input events to reports: the same assembly for live pointers and recordings.
#pragma once

#include "estimator/pointer.hpp"
#include "estimator/report.hpp"
#include "input/absolute_axes.hpp"

#include <cstdint>
#include <linux/input.h>
#include <optional>
#include <span>

namespace sagitta::input {

/// Largest step on an axis in one packet that is believed, counts or device units.
constexpr std::int64_t k_max_delta = 32767;
/// Stamps from here on, the year 10000, are no stamps; microseconds stay far from overflow.
constexpr std::int64_t k_seconds_end = 253'402'300'800;

/// Assembles the packets of one pointer. A packet ends with SYN_REPORT; packets without motion,
/// button edge or wheel step make no report.
///
/// SYN_DROPPED: everything up to and including the next SYN_REPORT is ignored, and the next
/// report carries after_loss (Source: Linux, Documentation/input/event-codes.rst). No button edge
/// is made up for what was lost: its time is unknown. Whoever follows held buttons forgets them.
/// Stamps that run backwards are treated as a loss too, and counted; the later packets count from
/// the new time. A packet with a stamp that is none (a negative second, a million microseconds) is
/// ignored whole, one with a delta beyond +-32767 (no pointer sends more) loses its motion; both
/// are counted as a loss.
///
/// Relative pointers: REL_X, REL_Y, BTN_LEFT to BTN_TASK and the wheels. Touchpads and absolute
/// pointers: ABS_X and ABS_Y by AbsoluteAxes, in device units; fingers that scroll make a wheel
/// step of 1/120. For PointerKind::absolute the touch of a screen or of a pen's tip is the left
/// button, a pen's two side buttons are right and middle.
class PacketAssembler {
public:
    explicit PacketAssembler(estimator::PointerIndex pointer,
                             estimator::PointerKind kind = estimator::PointerKind::mouse);

    /// Appends the reports completed by `events` to `batch`. A packet cut by the end of `events`
    /// is continued by the next call.
    void add(std::span<const input_event> events, estimator::ReportBatch& batch);
    /// An event was lost on the way here (a broken line of a recording): as SYN_DROPPED, but not
    /// counted among drops().
    void lose();
    /// Tells which keys the kernel holds down, at the start and after a drop, so that a finger
    /// that already touches is known. Buttons among them make no report.
    void set_contacts(std::span<const std::uint16_t> codes_down);

    [[nodiscard]] std::uint64_t drops() const { return m_drops; }
    /// Stamps that ran backwards, or were no stamp.
    [[nodiscard]] std::uint64_t reversed_stamps() const { return m_reversed; }
    [[nodiscard]] std::uint64_t impossible_deltas() const { return m_impossible; }
    /// An unfinished packet is waiting for its SYN_REPORT.
    [[nodiscard]] bool mid_packet() const { return m_mid_packet; }

private:
    struct Wheel {
        std::int64_t steps = 0, hi_res = 0;
        bool has_hi_res = false;
        [[nodiscard]] std::int64_t in_120ths() const;
    };

    void take_other(const input_event& event);
    void take_key(const input_event& event);
    void finish(const input_event& end, std::int64_t dx, std::int64_t dy,
                estimator::ReportBatch& batch);
    void start_packet();

    estimator::PointerIndex m_pointer;
    estimator::PointerKind m_kind;
    std::optional<AbsoluteAxes> m_axes; ///< touchpads and absolute pointers
    std::int64_t m_dx = 0;              ///< of the open packet, as far as relative
    std::int64_t m_dy = 0;
    std::int64_t m_last_us; ///< stamp of the last packet
    Wheel m_vertical, m_horizontal;
    estimator::ButtonSet m_pressed = 0;
    estimator::ButtonSet m_released = 0;
    bool m_mid_packet = false;
    bool m_plain = true;     ///< open packet: motion only, and no loss to tell of
    bool m_ignoring = false; ///< until the next SYN_REPORT
    bool m_lost = false;     ///< the next report carries after_loss
    std::uint64_t m_drops = 0;
    std::uint64_t m_reversed = 0;
    std::uint64_t m_impossible = 0;
};

} // namespace sagitta::input
