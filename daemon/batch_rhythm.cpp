#include "daemon/batch_rhythm.hpp"

#include <algorithm>
#include <cstdlib>

namespace sagitta::daemon {

namespace {

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
            m_last_fast.reset();
            continue;
        }
        if (m_last_fast) {
            m_window[m_filled++] = report.time - *m_last_fast;
        }
        m_last_fast = report.time;
        if (m_filled == m_window.size()) {
            m_filled = 0;
            learn_window();
        }
    }
}

// Down at once, since a full buffer loses reports; up slowly, so that a burst of late reports is
// forgotten after a while.
void BatchRhythm::learn_window() {
    const auto median = m_window.begin() + m_window.size() / 2 - 1;
    std::nth_element(m_window.begin(), median, m_window.end());
    const estimator::Micros interval = *median;
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
