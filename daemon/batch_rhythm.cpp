#include "daemon/batch_rhythm.hpp"

#include <algorithm>
#include <cstdlib>

namespace sagitta::daemon {

namespace {

constexpr int k_window = 8;

bool at_every_poll(const estimator::Report& report) {
    return std::abs(report.dx) + std::abs(report.dy) >= 2;
}

} // namespace

void BatchRhythm::learn(std::span<const estimator::Report> reports) {
    for (const estimator::Report& report : reports) {
        if (report.after_loss) {
            // An overrun proves that the interval was misjudged.
            m_interval.reset();
        }
        if (report.after_loss || !at_every_poll(report)) {
            m_window_intervals = -1;
            continue;
        }
        if (m_window_intervals < 0) {
            m_window_start = report.time;
        }
        if (++m_window_intervals == k_window) {
            learn_window((report.time - m_window_start) / k_window);
            m_window_start = report.time;
            m_window_intervals = 0;
        }
    }
}

// Down at once, since a full buffer loses reports; up slowly, so that a burst of late reports is
// forgotten after a while.
void BatchRhythm::learn_window(estimator::Micros interval) {
    if (!m_interval || interval < *m_interval) {
        m_interval = interval;
    } else {
        m_interval = *m_interval + (interval - *m_interval) / 16;
    }
}

estimator::Micros BatchRhythm::period() const {
    return std::clamp(k_batch_reports * m_interval.value_or(k_fastest_interval), k_shortest_period,
                      k_longest_period);
}

} // namespace sagitta::daemon
