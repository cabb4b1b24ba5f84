#include "estimator/motion_grid.hpp"

#include <limits>

namespace sagitta::estimator {
namespace {

constexpr std::int64_t k_step_us = k_sample_interval.count();
constexpr std::int64_t k_ramp_us = k_longest_ramp.count();
// Room for the first ramp, which begins before the first report.
constexpr std::int64_t k_lead_us = k_ramp_us + k_step_us;

} // namespace

MotionGrid::MotionGrid(Micros span) : m_span_us{span.count() + k_lead_us} {
    const auto capacity = static_cast<std::size_t>(m_span_us / k_step_us + 2);
    m_x.samples.resize(capacity);
    m_y.samples.resize(capacity);
    // No run came before the first.
    m_x.last_change = m_y.last_change = std::numeric_limits<std::int64_t>::min() / 4;
}

void MotionGrid::Axis::begin(std::int64_t origin_moved_us) noexcept {
    filled = 0;
    counts = 0;
    next_sample = 0;
    // A run that follows another without a rest: its first ramp begins where the last one ended.
    last_change = std::max(last_change - origin_moved_us, -k_ramp_us);
}

void MotionGrid::begin(PointerTime time) noexcept {
    m_first = time;
    m_last = time;
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

void MotionGrid::Axis::ramp_to(std::int64_t now, std::int64_t counts_now) noexcept {
    const std::int64_t ramp_start = std::max(last_change, now - k_ramp_us);
    const auto from = static_cast<double>(counts);
    const double slope = now > ramp_start ? static_cast<double>(counts_now - counts) /
                                                static_cast<double>(now - ramp_start)
                                          : 0.0;
    for (; next_sample <= now; next_sample += k_step_us) {
        const std::int64_t into = next_sample - ramp_start;
        samples[filled++] = into <= 0 ? from : from + slope * static_cast<double>(into);
    }
}

void MotionGrid::Axis::hold_to(std::size_t size) noexcept {
    const auto value = static_cast<double>(counts);
    for (; filled < size; ++filled) {
        samples[filled] = value;
        next_sample += k_step_us;
    }
}

MotionGrid::Samples MotionGrid::samples() noexcept {
    const std::int64_t last = (m_last - m_origin).count();
    const auto size = static_cast<std::size_t>((last + k_step_us - 1) / k_step_us + 1);
    m_x.hold_to(size);
    m_y.hold_to(size);
    return {{m_x.samples.data(), size}, {m_y.samples.data(), size}};
}

} // namespace sagitta::estimator
