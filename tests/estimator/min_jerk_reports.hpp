// A hand for tests: minimum-jerk movements as quantised reports, one command after another.
#pragma once

#include "estimator/report.hpp"

#include <cmath>
#include <vector>

namespace sagitta::tests {

class MinJerkReports {
public:
    explicit MinJerkReports(estimator::PointerIndex pointer = {},
                            estimator::Micros start = std::chrono::seconds{1},
                            estimator::Micros interval = std::chrono::milliseconds{1})
        : m_pointer{pointer}, m_now{start}, m_interval{interval} {}

    /// Moves by (dx, dy) counts, + = right and towards the person.
    MinJerkReports& move(double dx, double dy, estimator::Micros duration) {
        const double x0 = m_x;
        const double y0 = m_y;
        const estimator::Micros begin = m_now;
        while (m_now - begin < duration) {
            m_now += m_interval;
            const double tau = std::min(1.0, static_cast<double>((m_now - begin).count()) /
                                                 static_cast<double>(duration.count()));
            const double share = tau * tau * tau * (10.0 + tau * (6.0 * tau - 15.0));
            go_to(x0 + share * dx, y0 + share * dy);
        }
        return *this;
    }
    MinJerkReports& rest(estimator::Micros duration) {
        m_now += duration;
        return *this;
    }
    MinJerkReports& press(estimator::Button button) {
        add({}).pressed = static_cast<estimator::ButtonSet>(button);
        return *this;
    }
    MinJerkReports& release(estimator::Button button) {
        add({}).released = static_cast<estimator::ButtonSet>(button);
        return *this;
    }
    MinJerkReports& click() {
        press(estimator::Button::left).rest(std::chrono::milliseconds{70});
        return release(estimator::Button::left);
    }
    MinJerkReports& wheel(std::uint16_t steps_120ths) {
        add({}).wheel_120ths = steps_120ths;
        return *this;
    }
    [[nodiscard]] const std::vector<estimator::Report>& reports() const { return m_reports; }

private:
    estimator::Report& add(estimator::Report report) {
        report.time = estimator::PointerTime{m_now};
        report.pointer = m_pointer;
        m_reports.push_back(report);
        return m_reports.back();
    }
    void go_to(double x, double y) {
        m_x = x;
        m_y = y;
        const auto counts_x = static_cast<std::int32_t>(std::lround(x));
        const auto counts_y = static_cast<std::int32_t>(std::lround(y));
        estimator::Report report;
        report.dx = counts_x - m_counts_x;
        report.dy = counts_y - m_counts_y;
        if (report.dx != 0 || report.dy != 0) {
            add(report);
        }
        m_counts_x = counts_x;
        m_counts_y = counts_y;
    }

    estimator::PointerIndex m_pointer;
    estimator::Micros m_now;
    estimator::Micros m_interval;
    double m_x = 0.0;
    double m_y = 0.0;
    std::int32_t m_counts_x = 0;
    std::int32_t m_counts_y = 0;
    std::vector<estimator::Report> m_reports;
};

} // namespace sagitta::tests
