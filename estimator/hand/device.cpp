#include "estimator/hand/device.hpp"

#include <algorithm>
#include <cmath>

namespace sagitta::estimator::hand {

namespace {

/// floor() without a call into the library.
std::int64_t whole(double value) {
    const auto truncated = static_cast<std::int64_t>(value);
    return truncated - (value < static_cast<double>(truncated) ? 1 : 0);
}

/// What became of one report on its way.
enum class Passage { plain, late, doubled, merged };

Passage draw_passage(const Electronics& electronics, Random& random) {
    const double late = electronics.late_share;
    const double doubled = late + electronics.doubled_share;
    const double merged = doubled + electronics.merged_share;
    if (merged <= 0.0) {
        return Passage::plain;
    }
    const double u = random.uniform();
    if (u >= merged) {
        return Passage::plain;
    }
    return u < late ? Passage::late : (u < doubled ? Passage::doubled : Passage::merged);
}

constexpr double k_late_intervals = 3.0;

double interval_us(const Electronics& electronics) {
    const double own = 1e6 / electronics.reports_per_s;
    return electronics.coalesced_per_s > 0.0 ? std::max(own, 1e6 / electronics.coalesced_per_s)
                                             : own;
}

} // namespace

Device::Device(PointerIndex pointer, const Electronics& electronics, std::uint64_t seed)
    : m_pointer{pointer}, m_electronics{electronics}, m_random{seed, 0xdecafU},
      m_interval_us{interval_us(electronics)}, m_clock_phase{m_random.uniform()},
      m_step_x{m_random.uniform()}, m_step_y{m_random.uniform()} {}

void Device::move(const AimedPath& path, PointerTime start, ReportBatch& batch) {
    PathWalk walk{path, until_poll_us(start) * 1e-6, m_interval_us * 1e-6};
    sample([&walk] { return walk.next(); }, path.end(), path.motion_s(), start, batch);
}

void Device::move(const std::function<Point(double)>& position, double duration_s,
                  PointerTime start, ReportBatch& batch) {
    double t = until_poll_us(start) * 1e-6;
    const auto next = [&] {
        const Point at = position(t);
        t += m_interval_us * 1e-6;
        return at;
    };
    sample(next, position(duration_s), duration_s, start, batch);
}

template <class Next>
void Device::sample(Next next, Point end, double duration_s, PointerTime start,
                    ReportBatch& batch) {
    const double counts_per_mm = m_electronics.cpi.value() / k_mm_per_inch;
    const double duration_us = duration_s * 1e6;
    std::int64_t sent_x = 0;
    std::int64_t sent_y = 0;
    // One poll beyond the end brings the last counts.
    bool over = false;
    for (double t = until_poll_us(start); !over; t += m_interval_us) {
        over = t >= duration_us;
        const Point at = over ? end : next();
        const std::int64_t x = whole(m_step_x + at.x_mm * counts_per_mm);
        const std::int64_t y = whole(m_step_y + at.y_mm * counts_per_mm);
        if (x == sent_x && y == sent_y) {
            continue;
        }
        const Passage passage = draw_passage(m_electronics, m_random);
        if (passage == Passage::merged && !over) {
            continue;
        }
        const double lag = passage == Passage::late
                               ? m_random.uniform(0.0, k_late_intervals) * m_interval_us
                               : 0.0;
        const PointerTime time = stamp(start, t + lag);
        auto dx = static_cast<std::int32_t>(x - sent_x);
        auto dy = static_cast<std::int32_t>(sent_y - y); // the kernel's y points at the person
        sent_x = x;
        sent_y = y;
        if (passage == Passage::doubled && (dx / 2 != 0 || dy / 2 != 0)) {
            Report& first = append(time, batch);
            first.dx = dx / 2;
            first.dy = dy / 2;
            dx -= dx / 2;
            dy -= dy / 2;
        }
        Report& report = append(time, batch);
        report.dx = dx;
        report.dy = dy;
    }
    m_step_x += end.x_mm * counts_per_mm - static_cast<double>(sent_x);
    m_step_y += end.y_mm * counts_per_mm - static_cast<double>(sent_y);
}

double Device::until_poll_us(PointerTime start) const {
    const double polls =
        static_cast<double>(start.time_since_epoch().count()) / m_interval_us - m_clock_phase;
    return std::max(0.0, (std::ceil(polls) - polls) * m_interval_us);
}

PointerTime Device::stamp(PointerTime start, double after_us) {
    double lag = 0.0;
    if (m_electronics.jitter > 0.0) {
        lag = m_random.uniform() * m_electronics.jitter * m_interval_us;
    }
    const auto after = static_cast<std::int64_t>(after_us + lag + 0.5);
    return std::max(m_last, start + Micros{after});
}

Report& Device::append(PointerTime time, ReportBatch& batch) {
    m_last = time;
    Report& report = batch.emplace_back();
    report.time = time;
    report.pointer = m_pointer;
    return report;
}

void Device::lift() {
    m_step_x = m_random.uniform();
    m_step_y = m_random.uniform();
}

void Device::press(PointerTime time, Button button, ReportBatch& batch) {
    append(stamp(time, until_poll_us(time)), batch).pressed = static_cast<ButtonSet>(button);
}

void Device::release(PointerTime time, Button button, ReportBatch& batch) {
    append(stamp(time, until_poll_us(time)), batch).released = static_cast<ButtonSet>(button);
}

void Device::wheel(PointerTime time, std::uint16_t steps_120ths, ReportBatch& batch) {
    append(stamp(time, until_poll_us(time)), batch).wheel_120ths = steps_120ths;
}

} // namespace sagitta::estimator::hand
