#include "estimator/path.hpp"

#include <algorithm>
#include <cmath>

namespace sagitta::estimator {
namespace {

// The filtered movement reaches out of the run on both sides. Behind it the filter's response must
// have died away before the backward pass begins: at 12.5 Hz, 200 ms leave less than 1e-4.
constexpr std::size_t k_pad_before = 20;
constexpr std::size_t k_pad_behind = 40;

PointerTime at_sample(PointerTime origin, double sample) {
    const double us = sample * static_cast<double>(k_sample_interval.count());
    return origin + Micros{std::llround(us)};
}

struct Peak {
    double place; ///< samples
    double value;
};

// The vertex of the parabola fitted to the seven samples around the highest: less at the mercy of
// jitter than that sample itself. Source of the weights: Savitzky & Golay (1964).
Peak refine_peak(std::span<const double> values, std::size_t i) {
    constexpr std::size_t k_reach = 3;
    const Peak highest{static_cast<double>(i), values[i]};
    if (i < k_reach || i + k_reach >= values.size()) {
        return highest;
    }
    const double* const v = values.data() + i;
    const double level =
        (7.0 * v[0] + 6.0 * (v[1] + v[-1]) + 3.0 * (v[2] + v[-2]) - 2.0 * (v[3] + v[-3])) / 21.0;
    const double slope = ((v[1] - v[-1]) + 2.0 * (v[2] - v[-2]) + 3.0 * (v[3] - v[-3])) / 28.0;
    const double bend = (-4.0 * v[0] - 3.0 * (v[1] + v[-1]) + 5.0 * (v[3] + v[-3])) / 84.0;
    const double shift = -0.5 * slope / bend;
    if (!(bend < 0.0) || std::abs(shift) > static_cast<double>(k_reach)) {
        return highest;
    }
    return {static_cast<double>(i) + shift, level + 0.5 * slope * shift};
}

// Length along the samples [first, last]. Before and behind them the straight way counts, so that
// the wobble of a resting hand adds nothing and the length is never below the distance.
double polyline(const std::vector<double>& x, const std::vector<double>& y, std::size_t first,
                std::size_t last, double scale_x, double scale_y) {
    const auto way = [&](std::size_t from, std::size_t to) {
        const double dx = (x[to] - x[from]) * scale_x;
        const double dy = (y[to] - y[from]) * scale_y;
        return std::sqrt(dx * dx + dy * dy);
    };
    double length = way(0, first) + way(last, x.size() - 1);
    for (std::size_t i = first; i < last; ++i) {
        length += way(i, i + 1);
    }
    return length;
}

} // namespace

PathBuilder::PathBuilder()
    : m_filter{LowPass::butterworth2(dual_pass_cutoff(k_path_cutoff_hz), k_sample_rate_hz)} {}

const Path& PathBuilder::build(std::span<const double> x, std::span<const double> y,
                               PointerTime origin, const Calibration& calibration) {
    pad(x, y);
    zero_phase(m_filter, m_x, m_y);
    differentiate(calibration);
    find_ends(origin - static_cast<Micros::rep>(k_pad_before) * k_sample_interval);
    project(x.back(), y.back(), calibration);
    m_path.length_mm = polyline(m_x, m_y, m_path.first, m_path.last, calibration.mm_per_count_x,
                                calibration.mm_per_count_y);
    // With a flat gain the two planes differ by one factor on both axes.
    m_path.length_px =
        calibration.gain.is_flat()
            ? m_path.length_mm * calibration.px_per_count_x / calibration.mm_per_count_x *
                  calibration.gain.factor_at(MillimetresPerSecond::zero())
            : polyline(m_path.x_px, m_path.y_px, m_path.first, m_path.last, 1.0, 1.0);
    return m_path;
}

void PathBuilder::pad(std::span<const double> x, std::span<const double> y) {
    const std::size_t size = k_pad_before + x.size() + k_pad_behind;
    m_x.resize(size);
    m_y.resize(size);
    const auto fill = [](std::vector<double>& padded, std::span<const double> samples) {
        auto place = std::fill_n(padded.begin(), k_pad_before, samples.front());
        place = std::copy(samples.begin(), samples.end(), place);
        std::fill(place, padded.end(), samples.back());
    };
    fill(m_x, x);
    fill(m_y, y);
}

void PathBuilder::differentiate(const Calibration& calibration) {
    const std::size_t size = m_x.size();
    m_path.vx_mm_s.resize(size);
    m_path.vy_mm_s.resize(size);
    m_path.speed_mm_s.resize(size);
    const double scale_x = calibration.mm_per_count_x / (2.0 * k_sample_interval_s);
    const double scale_y = -calibration.mm_per_count_y / (2.0 * k_sample_interval_s);
    double* const vx = m_path.vx_mm_s.data();
    double* const vy = m_path.vy_mm_s.data();
    double* const speed = m_path.speed_mm_s.data();
    vx[0] = vy[0] = speed[0] = 0.0;
    vx[size - 1] = vy[size - 1] = speed[size - 1] = 0.0;
    for (std::size_t i = 1; i + 1 < size; ++i) {
        vx[i] = (m_x[i + 1] - m_x[i - 1]) * scale_x;
        vy[i] = (m_y[i + 1] - m_y[i - 1]) * scale_y;
        speed[i] = std::sqrt(vx[i] * vx[i] + vy[i] * vy[i]);
    }
}

void PathBuilder::find_ends(PointerTime padded_origin) {
    const std::span<const double> speed{m_path.speed_mm_s};
    const auto highest =
        static_cast<std::size_t>(std::max_element(speed.begin(), speed.end()) - speed.begin());
    const Peak peak = refine_peak(speed, highest);
    const double threshold = k_speed_threshold * peak.value;
    // Both ends of the padded speed are 0, so the crossings lie inside.
    std::size_t first = 0;
    while (first < highest && speed[first] < threshold) {
        ++first;
    }
    std::size_t last = speed.size() - 1;
    while (last > highest && speed[last] < threshold) {
        --last;
    }
    double start = static_cast<double>(first);
    if (first > 0 && speed[first] > speed[first - 1]) {
        start -= (speed[first] - threshold) / (speed[first] - speed[first - 1]);
    }
    double end = static_cast<double>(last);
    if (last + 1 < speed.size() && speed[last] > speed[last + 1]) {
        end += (speed[last] - threshold) / (speed[last] - speed[last + 1]);
    }
    m_path.first = first;
    m_path.last = last;
    m_path.start = at_sample(padded_origin, start);
    m_path.end = at_sample(padded_origin, end);
    m_path.peak_speed_mm_s = peak.value;
    m_path.peak_time = at_sample(padded_origin, peak.place);
    m_path.peak_sample = peak.place;
}

void PathBuilder::project(double last_x, double last_y, const Calibration& calibration) {
    const std::size_t size = m_x.size();
    m_path.x_px.resize(size);
    m_path.y_px.resize(size);
    double* const x = m_path.x_px.data();
    double* const y = m_path.y_px.data();
    if (calibration.gain.is_flat()) {
        const double factor = calibration.gain.factor_at(MillimetresPerSecond::zero());
        const double scale_x = calibration.px_per_count_x * factor;
        const double scale_y = -calibration.px_per_count_y * factor;
        for (std::size_t i = 0; i < size; ++i) {
            x[i] = m_x[i] * scale_x;
            y[i] = m_y[i] * scale_y;
        }
        // The counts themselves, without the last trace of the filter.
        m_path.press_x_px = last_x * scale_x;
        m_path.press_y_px = last_y * scale_y;
    } else {
        x[0] = y[0] = 0.0;
        for (std::size_t i = 1; i < size; ++i) {
            const double speed = 0.5 * (m_path.speed_mm_s[i - 1] + m_path.speed_mm_s[i]);
            const double factor = calibration.gain.factor_at(MillimetresPerSecond::of(speed));
            x[i] = x[i - 1] + (m_x[i] - m_x[i - 1]) * calibration.px_per_count_x * factor;
            y[i] = y[i - 1] - (m_y[i] - m_y[i - 1]) * calibration.px_per_count_y * factor;
        }
        m_path.press_x_px = x[size - 1];
        m_path.press_y_px = y[size - 1];
    }
}

} // namespace sagitta::estimator
