#include "estimator/motion_grid.hpp"

#include <algorithm>
#include <cstdlib>

namespace sagitta::estimator {
namespace {

constexpr std::int32_t k_step_us = k_sample_interval.count();
constexpr std::int32_t k_ramp_us = k_longest_ramp.count();
// Room for the first ramp, which begins before the first report.
constexpr std::int32_t k_lead_us = k_ramp_us + k_step_us;

} // namespace

// ---- the axis ------------------------------------------------------------------------------

void MotionGrid::Axis::reserve(std::size_t samples) {
    m_samples.resize(samples);
    // No run came before the first.
    m_last_change = -2 * k_ramp_us;
}

void MotionGrid::Axis::begin(std::int64_t origin_moved) noexcept {
    m_filled = 0;
    m_next_sample = 0;
    m_counts = 0.0;
    m_position = 0.0;
    m_ramped = 0.0;
    m_step_time = 0;
    m_waits = false;
    // A run that follows another without a rest: its first ramp begins where the last one ended.
    constexpr std::int64_t k_long_ago = -2 * k_ramp_us;
    const std::int64_t last = std::clamp<std::int64_t>(m_last_change - origin_moved, k_long_ago, 0);
    m_last_change = static_cast<Offset>(last);
}

/// Still until `from`, then straight to `position` at `to`.
inline void MotionGrid::Axis::fill(Offset from, Offset to, double position) noexcept {
    const double slope = to > from ? (position - m_ramped) / static_cast<double>(to - from) : 0.0;
    for (; m_next_sample <= to; m_next_sample += k_step_us) {
        const Offset into = m_next_sample - from;
        m_samples[m_filled++] = into <= 0 ? m_ramped : m_ramped + slope * static_cast<double>(into);
    }
}

inline void MotionGrid::Axis::ramp(Offset from, Offset to, double position) noexcept {
    fill(from, to, position);
    m_ramped = position;
}

inline void MotionGrid::Axis::step(Offset now, std::int32_t delta) noexcept {
    const Offset since = now - m_last_change;
    if (m_waits || since > k_ramp_us) [[unlikely]] {
        change_after_still(now, delta);
        return;
    }
    // Which axis a report moves is close to random, so an axis that stands still in it takes the
    // same way without a branch.
    const bool moves = delta != 0;
    const auto counts = static_cast<double>(delta);
    m_counts += counts;
    // Several counts at once: the hand was fast, and may be anywhere on the new step.
    const double to_middle = std::abs(delta) == 1 ? 0.5 * counts : 0.0;
    const double position = moves ? m_counts - to_middle : m_position;
    if (m_next_sample <= now && moves) [[unlikely]] {
        fill(m_last_change, now, position);
    }
    m_position = position;
    m_ramped = position;
    m_step_time = moves ? since : m_step_time;
    m_last_change = moves ? now : m_last_change;
}

void MotionGrid::Axis::change_after_still(Offset now, std::int32_t delta) noexcept {
    if (delta == 0) {
        return;
    }
    const Offset since = now - m_last_change;
    if (m_waits) {
        depart(std::min(since, k_ramp_us));
        if (since <= k_ramp_us) {
            step(now, delta);
            return;
        }
    }
    // On to the middle of the last step, then still, then the ramp that waits.
    const Offset settled = std::min(m_step_time, since / 2);
    settle(settled);
    m_waits = true;
    m_room = std::min(since - settled, k_ramp_us);
    const auto counts = static_cast<double>(delta);
    m_counts += counts;
    m_position = m_counts - (delta == 1 || delta == -1 ? 0.5 * counts : 0.0);
    m_last_change = now;
}

/// The way to the change that ended a still stretch. @param time  that the step behind it took
void MotionGrid::Axis::depart(Offset time) noexcept {
    m_step_time = std::min(time, m_room);
    ramp(m_last_change - m_step_time, m_last_change, m_position);
    m_waits = false;
}

/// Behind the last change the hand goes on to the middle of its step.
void MotionGrid::Axis::settle(Offset time) noexcept {
    ramp(m_last_change, m_last_change + time, m_counts);
}

std::span<const double> MotionGrid::Axis::finish(std::size_t size) noexcept {
    if (m_waits) {
        depart(k_ramp_us);
    }
    settle(m_step_time);
    std::fill(m_samples.begin() + static_cast<std::ptrdiff_t>(m_filled),
              m_samples.begin() + static_cast<std::ptrdiff_t>(size), m_counts);
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
    m_taken = 0;
    m_released = 0;
    m_window_sum = 0;
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

inline void MotionGrid::pass_on(Offset mean, const Pending& report) noexcept {
    // Where the reach of the mean changes, two means can change places by a little.
    m_last_release = std::max(m_last_release, mean);
    m_x.step(m_last_release, report.dx);
    m_y.step(m_last_release, report.dy);
}

inline void MotionGrid::add_one(Offset now, std::int32_t dx, std::int32_t dy) noexcept {
    if (m_taken > m_released && pending(m_taken - 1).time == now) [[unlikely]] {
        // One sample of the sensor, split over two reports.
        pending(m_taken - 1).dx += dx;
        pending(m_taken - 1).dy += dy;
        return;
    }
    m_window_sum += now - (m_taken >= k_window ? pending(m_taken - k_window).time : 0);
    pending(m_taken) = {now, dx, dy};
    ++m_taken;
    if (m_taken < k_window) [[unlikely]] {
        return;
    }
    const std::uint32_t centre = m_taken - 1 - k_window / 2;
    constexpr auto k_longest_window =
        static_cast<Offset>(k_window) * static_cast<Offset>(k_longest_interval.count());
    if (m_released == centre && now - pending(m_taken - k_window).time <= k_longest_window)
        [[likely]] {
        pass_on(m_window_sum / static_cast<Offset>(k_window), pending(centre));
        ++m_released;
        return;
    }
    for (; m_released <= centre; ++m_released) {
        release(m_released);
    }
}

std::size_t MotionGrid::add(std::span<const Report> reports) noexcept {
    if (m_reports == 0 && !reports.empty()) {
        begin(reports.front().time);
    }
    std::size_t taken = 0;
    for (const Report& report : reports) {
        const std::int64_t now = (report.time - m_origin).count();
        if (now > m_span_us) [[unlikely]] {
            break;
        }
        add_one(static_cast<Offset>(now), report.dx, report.dy);
        ++taken;
    }
    if (taken > 0) {
        m_last = reports[taken - 1].time;
        m_reports += static_cast<std::uint32_t>(taken);
    }
    return taken;
}

/// Sends a report to the axes with the mean stamp of those around it: as many on both sides as
/// there are, while they keep to k_longest_interval (jitter may add one interval to their span).
void MotionGrid::release(std::uint32_t place) noexcept {
    const std::uint32_t oldest = m_taken > k_window ? m_taken - k_window : 0;
    std::uint32_t reach = std::min({place - oldest, m_taken - 1 - place, k_window / 2});
    const auto is_close = [&](std::uint32_t r) {
        const auto count = static_cast<Offset>(2 * r + 1);
        return pending(place + r).time - pending(place - r).time <=
               count * static_cast<Offset>(k_longest_interval.count());
    };
    while (reach > 0 && !is_close(reach)) {
        --reach;
    }
    Offset sum = 0;
    for (std::uint32_t i = place - reach; i <= place + reach; ++i) {
        sum += pending(i).time;
    }
    pass_on(sum / static_cast<Offset>(2 * reach + 1), pending(place));
}

MotionGrid::Samples MotionGrid::samples() noexcept {
    for (; m_released < m_taken; ++m_released) {
        release(m_released);
    }
    const std::int64_t settled = (m_last - m_origin).count() + k_ramp_us;
    const auto size = static_cast<std::size_t>(settled / k_step_us + 2);
    return {m_x.finish(size), m_y.finish(size)};
}

} // namespace sagitta::estimator
