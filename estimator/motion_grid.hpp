// The staircase of a run's counts, turned into straight ramps and sampled at equal steps while the
// reports come in: memory is bounded by the run's length in time, whatever the report rate.
//
// Three things are mended on the way, since each would make a movement depend on the electronics:
// - Stamps jitter by up to a report interval. Where reports follow each other closely, each gets
//   the mean stamp of the reports around it. Regular stamps are their own mean, so a device that
//   does not jitter is left as it is.
// - A count says which step of the sensor the hand is on, not where on it. A single count is
//   reported as the hand crosses the step's edge, half a count before its middle; at rest it is
//   most likely in the middle. So a hand that dithers over an edge stands still on it.
// - Before the first count and behind the last, up to half a step is covered unseen. It is given
//   the time that the step next to it took.
#pragma once

#include "estimator/path.hpp"
#include "estimator/report.hpp"
#include "estimator/units.hpp"

#include <array>
#include <cstddef>
#include <cstdint>
#include <span>
#include <vector>

namespace sagitta::estimator {

/// A ramp joins two changes of an axis; it is never longer than this, before that the axis stands
/// still: a count that comes after a long pause tells nothing of when the pause ended.
constexpr Micros k_longest_ramp{80'000};
/// Up to seven stamps are averaged, as many as follow each other within this each: the interval of
/// 125 reports/s, the slowest rate in wide use (common practice, no source).
constexpr Micros k_longest_interval{8'000};

class MotionGrid {
public:
    /// @param span  longest run that fits, > 0, up to 5 minutes
    explicit MotionGrid(Micros span);

    /// Ends the run. The next add() begins a new one at the origin.
    void clear() noexcept { m_reports = 0; }
    /// Adds motion reports. @param reports  their stamps are in order, and not before the last
    /// one's
    /// @return how many were taken; fewer than all when the run no longer fits
    std::size_t add(std::span<const Report> reports) noexcept;

    [[nodiscard]] bool empty() const noexcept { return m_reports == 0; }
    [[nodiscard]] std::uint32_t reports() const noexcept { return m_reports; }
    [[nodiscard]] PointerTime first_motion() const noexcept { return m_first; }
    [[nodiscard]] PointerTime last_motion() const noexcept { return m_last; }
    /// Time of sample 0.
    [[nodiscard]] PointerTime origin() const noexcept { return m_origin; }

    /// Samples of the run so far, counts, from origin() in steps of k_sample_interval, until the
    /// hand has come to rest behind last_motion(). Call it once, at the run's end.
    struct Samples {
        std::span<const double> x; ///< counts, + = right
        std::span<const double> y; ///< counts, + = towards the person
    };
    [[nodiscard]] Samples samples() noexcept;

private:
    /// us since the grid's origin. A run is bounded, so 32 bits hold it.
    using Offset = std::int32_t;

    class Axis {
    public:
        void reserve(std::size_t samples);
        void begin(std::int64_t origin_moved) noexcept;
        void step(Offset now, std::int32_t delta) noexcept;
        std::span<const double> finish(std::size_t size) noexcept;

    private:
        void change_after_still(Offset now, std::int32_t delta) noexcept;
        void settle(Offset time) noexcept;
        void depart(Offset time) noexcept;
        void ramp(Offset from, Offset to, double position) noexcept;
        void fill(Offset from, Offset to, double position) noexcept;

        std::vector<double> m_samples; ///< counts; valid below m_filled
        std::size_t m_filled = 0;
        Offset m_next_sample = 0; ///< time of sample m_filled
        Offset m_last_change = 0; ///< may lie in the run before
        Offset m_step_time = 0;   ///< that the last step took
        /// The last change ended a still stretch: its ramp waits for the next change, and may
        /// reach this far back.
        bool m_waits = false;
        Offset m_room = 0;
        double m_counts = 0.0;   ///< cumulative, whole
        double m_position = 0.0; ///< likeliest one at the last change
        double m_ramped = 0.0;   ///< position at the end of the last ramp
    };

    struct Pending {
        Offset time;
        std::int32_t dx;
        std::int32_t dy;
    };
    static constexpr std::uint32_t k_window = 7;
    static constexpr std::uint32_t k_ring = 8; ///< a power of two above k_window

    void begin(PointerTime time) noexcept;
    void add_one(Offset now, std::int32_t dx, std::int32_t dy) noexcept;
    void release(std::uint32_t place) noexcept;
    void pass_on(Offset mean, const Pending& report) noexcept;
    [[nodiscard]] Pending& pending(std::uint32_t place) noexcept { return m_ring[place % k_ring]; }

    std::int64_t m_span_us;
    PointerTime m_origin{};
    PointerTime m_first{};
    PointerTime m_last{};
    std::uint32_t m_reports = 0;
    /// The last reports by their place in the run; those below m_released have gone to the axes.
    std::array<Pending, k_ring> m_ring{};
    std::uint32_t m_taken = 0;
    std::uint32_t m_released = 0;
    Offset m_window_sum = 0; ///< of the last k_window stamps
    Offset m_last_release = 0;
    Axis m_x;
    Axis m_y;
};

} // namespace sagitta::estimator
