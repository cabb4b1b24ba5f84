// The electronics of a pointing device: from the continuous path of its sensor to reports.
#pragma once

#include "estimator/hand/aimed_path.hpp"
#include "estimator/report.hpp"

#include <functional>

namespace sagitta::estimator::hand {

/// What the electronics add to a hand. Shares are probabilities per report.
struct Electronics {
    Cpi cpi = Cpi::of(1000.0);
    double reports_per_s = 125.0;
    double jitter = 0.1;        ///< a stamp is late by up to this share of an interval, [0, 1]
    double late_share = 0.001;  ///< stamped up to three intervals late
    double doubled_share = 0.0; ///< motion split over two reports with one stamp
    double merged_share = 0.0;  ///< report skipped, its counts come with the next
    /// Counts held back and delivered at this rate (a compositor's 60 Hz); 0 = not.
    double coalesced_per_s = 0.0;
};

/// Samples paths at the report rate. Counts are the whole steps of the cumulative position on each
/// axis, so rounding never accumulates; the fraction of a step carries over to the next path.
/// Reports come out in the order of time.
class Device {
public:
    /// @param seed  fixes the phases of clock and steps, and all jitter
    Device(PointerIndex pointer, const Electronics& electronics, std::uint64_t seed);

    /// Appends the motion reports of `path` from `start` to its end.
    void move(const AimedPath& path, PointerTime start, ReportBatch& batch);
    /// The same for any sensor path.
    /// @param position  displacement since `start` at a time in s, 0 at 0
    void move(const std::function<Point(double)>& position, double duration_s, PointerTime start,
              ReportBatch& batch);
    /// The sensor is lifted and set down elsewhere: nothing is reported, the fraction of a step is
    /// lost.
    void lift();
    void press(PointerTime time, Button button, ReportBatch& batch);
    void release(PointerTime time, Button button, ReportBatch& batch);
    /// @param steps_120ths  120 = one detent
    void wheel(PointerTime time, std::uint16_t steps_120ths, ReportBatch& batch);

    [[nodiscard]] const Electronics& electronics() const { return m_electronics; }
    /// Stamp of the last report.
    [[nodiscard]] PointerTime last_stamp() const { return m_last; }

private:
    /// @param next  the position at one poll after the other, from the first after `start`
    template <class Next>
    void sample(Next next, Point end, double duration_s, PointerTime start, ReportBatch& batch);
    /// Time from `start` to the first poll at or after it, us.
    [[nodiscard]] double until_poll_us(PointerTime start) const;
    [[nodiscard]] PointerTime stamp(PointerTime start, double after_us);
    Report& append(PointerTime time, ReportBatch& batch);

    PointerIndex m_pointer;
    Electronics m_electronics;
    Random m_random;
    double m_interval_us;
    double m_clock_phase;      ///< share of an interval
    double m_step_x, m_step_y; ///< position within a step, counts, [0, 1)
    PointerTime m_last{};
};

} // namespace sagitta::estimator::hand
