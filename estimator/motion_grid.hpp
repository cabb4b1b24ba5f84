// The staircase of a run's counts, turned into straight ramps and sampled at equal steps while the
// reports come in: memory is bounded by the run's length in time, whatever the report rate.
#pragma once

#include "estimator/path.hpp"
#include "estimator/units.hpp"

#include <algorithm>
#include <array>
#include <cstdint>
#include <span>
#include <vector>

namespace sagitta::estimator {

/// A ramp joins two changes of an axis; it is never longer than this, before that the axis stands
/// still: a count that comes after a long pause tells nothing of when the pause ended.
constexpr Micros k_longest_ramp{80'000};

class MotionGrid {
public:
    /// @param span  longest run that fits, > 0
    explicit MotionGrid(Micros span);

    /// Ends the run. The next add() begins a new one at the origin.
    void clear() noexcept { m_reports = 0; }
    /// Adds one motion report. @param time  not before the last one's
    /// @return false when the run no longer fits; the report is then not taken
    bool add(PointerTime time, std::int32_t dx, std::int32_t dy) noexcept;

    [[nodiscard]] bool empty() const noexcept { return m_reports == 0; }
    [[nodiscard]] std::uint32_t reports() const noexcept { return m_reports; }
    [[nodiscard]] PointerTime first_motion() const noexcept { return m_first; }
    [[nodiscard]] PointerTime last_motion() const noexcept { return m_last; }
    /// Time of sample 0.
    [[nodiscard]] PointerTime origin() const noexcept { return m_origin; }

    /// Samples of the run so far, counts, from origin() in steps of k_sample_interval, up to the
    /// first sample at or after last_motion(). Valid until the next add() or clear().
    struct Samples {
        std::span<const double> x; ///< counts, + = right
        std::span<const double> y; ///< counts, + = towards the person
    };
    [[nodiscard]] Samples samples() noexcept;

private:
    struct Axis {
        std::vector<double> samples; ///< counts; valid below `filled`
        std::size_t filled = 0;
        std::int64_t counts = 0;      ///< cumulative, at the last change
        std::int64_t last_change = 0; ///< us since the grid's origin; may lie in the run before
        std::int64_t next_sample = 0; ///< us since the grid's origin, of sample `filled`

        void begin(std::int64_t origin_moved_us) noexcept;
        void step(std::int64_t now, std::int32_t delta) noexcept;
        void ramp_to(std::int64_t now, std::int64_t counts_now) noexcept;
        void hold_to(std::size_t size) noexcept;
    };

    void begin(PointerTime time) noexcept;

    std::int64_t m_span_us;
    PointerTime m_origin{};
    PointerTime m_first{};
    PointerTime m_last{};
    std::uint32_t m_reports = 0;
    Axis m_x;
    Axis m_y;
};

inline void MotionGrid::Axis::step(std::int64_t now, std::int32_t delta) noexcept {
    if (delta == 0) {
        return;
    }
    const std::int64_t counts_now = counts + delta;
    if (now >= next_sample) {
        ramp_to(now, counts_now);
    }
    counts = counts_now;
    last_change = now;
}

inline bool MotionGrid::add(PointerTime time, std::int32_t dx, std::int32_t dy) noexcept {
    if (m_reports == 0) {
        begin(time);
    }
    const std::int64_t now = (time - m_origin).count();
    if (now > m_span_us) {
        return false;
    }
    m_x.step(now, dx);
    m_y.step(now, dy);
    m_last = time;
    ++m_reports;
    return true;
}

} // namespace sagitta::estimator
