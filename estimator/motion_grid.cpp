#include "estimator/motion_grid.hpp"

#include <algorithm>
#include <limits>

namespace sagitta::estimator {
namespace {

constexpr std::int64_t k_step_us = k_sample_interval.count();
constexpr std::int64_t k_ramp_us = k_longest_ramp.count();
// Room for the first ramp, which begins before the first report.
constexpr std::int64_t k_lead_us = k_ramp_us + k_step_us;
constexpr double k_half_count = 0.5;

} // namespace

// ---- the axis ------------------------------------------------------------------------------

void MotionGrid::Axis::reserve(std::size_t samples) {
    m_samples.resize(samples);
    // No run came before the first.
    m_last_change = std::numeric_limits<std::int64_t>::min() / 4;
}

void MotionGrid::Axis::begin(std::int64_t origin_moved) noexcept {
    m_filled = 0;
    m_next_sample = 0;
    m_counts = 0;
    m_position = 0.0;
    m_ramped = 0.0;
    m_step_time = 0;
    m_waits = false;
    // A run that follows another without a rest: its first ramp begins where the last one ended.
    m_last_change = std::max(m_last_change - origin_moved, -2 * k_ramp_us);
}

void MotionGrid::Axis::change(std::int64_t now, std::int32_t delta) noexcept {
    const std::int64_t since = now - m_last_change;
    if (m_waits) {
        depart(std::min(since, k_ramp_us));
    }
    const auto level = static_cast<double>(m_counts);
    const bool still = since > k_ramp_us;
    if (still) {
        settle(std::min(m_step_time, since / 2));
    }
    m_counts += delta;
    // Several counts at once: the hand was fast, and may be anywhere on the new step.
    m_position = delta == 1    ? level + k_half_count
                 : delta == -1 ? level - k_half_count
                               : static_cast<double>(m_counts);
    if (still) {
        m_waits = true;
        m_room = std::min(since - std::min(m_step_time, since / 2), k_ramp_us);
    } else {
        ramp(m_last_change, now, m_position);
        m_step_time = since;
    }
    m_last_change = now;
}

/// The way to the change that ended a still stretch. @param time  that the step behind it took
void MotionGrid::Axis::depart(std::int64_t time) noexcept {
    m_step_time = std::min(time, m_room);
    ramp(m_last_change - m_step_time, m_last_change, m_position);
    m_waits = false;
}

/// Behind the last change the hand goes on to the middle of its step.
void MotionGrid::Axis::settle(std::int64_t time) noexcept {
    ramp(m_last_change, m_last_change + time, static_cast<double>(m_counts));
}

void MotionGrid::Axis::fill(std::int64_t from, std::int64_t to, double position) noexcept {
    const double slope = to > from ? (position - m_ramped) / static_cast<double>(to - from) : 0.0;
    for (; m_next_sample <= to; m_next_sample += k_step_us) {
        const std::int64_t into = m_next_sample - from;
        m_samples[m_filled++] = into <= 0 ? m_ramped : m_ramped + slope * static_cast<double>(into);
    }
}

std::span<const double> MotionGrid::Axis::finish(std::size_t size) noexcept {
    if (m_waits) {
        depart(k_ramp_us);
    }
    settle(m_step_time);
    std::fill(m_samples.begin() + static_cast<std::ptrdiff_t>(m_filled),
              m_samples.begin() + static_cast<std::ptrdiff_t>(size), static_cast<double>(m_counts));
    return {m_samples.data(), size};
}

// ---- the stamps ----------------------------------------------------------------------------

MotionGrid::MotionGrid(Micros span) : m_span_us{span.count() + k_lead_us} {
    const auto capacity = static_cast<std::size_t>((m_span_us + k_ramp_us) / k_step_us + 2);
    m_x.reserve(capacity);
    m_y.reserve(capacity);
}

void MotionGrid::begin(PointerTime time) noexcept {
    m_first = time;
    m_last = time;
    m_pending = 0;
    m_released = 0;
    m_last_release = 0;
    // Sample times are whole multiples of the step, so that they do not depend on which report
    // happened to come first.
    const std::int64_t lead = time.time_since_epoch().count() - k_lead_us;
    std::int64_t remainder = lead % k_step_us;
    remainder += remainder < 0 ? k_step_us : 0;
    const PointerTime origin{Micros{lead - remainder + k_step_us}};
    const std::int64_t moved = (origin - m_origin).count();
    m_origin = origin;
    m_x.begin(moved);
    m_y.begin(moved);
}

bool MotionGrid::add(PointerTime time, std::int32_t dx, std::int32_t dy) noexcept {
    if (m_reports == 0) [[unlikely]] {
        begin(time);
    }
    const std::int64_t now = (time - m_origin).count();
    if (now > m_span_us) [[unlikely]] {
        return false;
    }
    m_last = time;
    ++m_reports;
    if (m_pending > 0 && m_window[m_pending - 1].time == now && m_released < m_pending)
        [[unlikely]] {
        // One sample of the sensor, split over two reports.
        m_window[m_pending - 1].dx += dx;
        m_window[m_pending - 1].dy += dy;
        return true;
    }
    if (m_pending == k_window) [[likely]] {
        std::copy(m_window.begin() + 1, m_window.end(), m_window.begin());
        --m_pending;
        --m_released;
    }
    m_window[m_pending++] = {now, dx, dy};
    if (m_pending == k_window) [[likely]] {
        release_up_to(k_window / 2 + 1);
    }
    return true;
}

/// Sends a report to the axes with the mean stamp of those around it: as many on both sides as
/// there are, while they keep to k_longest_interval (jitter may add one interval to their span).
void MotionGrid::release(std::size_t place) noexcept {
    constexpr std::size_t k_centre = k_window / 2;
    std::size_t reach = std::min({place, m_pending - 1 - place, k_centre});
    const auto is_close = [&](std::size_t r) {
        const auto count = static_cast<std::int64_t>(2 * r + 1);
        return m_window[place + r].time - m_window[place - r].time <=
               count * k_longest_interval.count();
    };
    while (reach > 0 && !is_close(reach)) {
        --reach;
    }
    std::int64_t sum = 0;
    for (std::size_t i = place - reach; i <= place + reach; ++i) {
        sum += m_window[i].time;
    }
    // Where the reach changes, two means can change places by a little.
    m_last_release = std::max(m_last_release, sum / static_cast<std::int64_t>(2 * reach + 1));
    m_x.step(m_last_release, m_window[place].dx);
    m_y.step(m_last_release, m_window[place].dy);
}

void MotionGrid::release_up_to(std::size_t end) noexcept {
    for (; m_released < end; ++m_released) {
        release(m_released);
    }
}

MotionGrid::Samples MotionGrid::samples() noexcept {
    release_up_to(m_pending);
    const std::int64_t settled = (m_last - m_origin).count() + k_ramp_us;
    const auto size = static_cast<std::size_t>(settled / k_step_us + 2);
    return {m_x.finish(size), m_y.finish(size)};
}

} // namespace sagitta::estimator
