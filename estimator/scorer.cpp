#include "estimator/scorer.hpp"

#include "estimator/deviation.hpp"
#include "estimator/smoothness.hpp"
#include "estimator/turns.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>
#include <span>

namespace sagitta::estimator {
namespace {

constexpr double k_degrees_per_radian = 180.0 / std::numbers::pi;

// The path is filtered to 10 Hz, so every fourth sample, 50 a second, tells its spectrum as well.
constexpr std::size_t k_thinning = 4;

double interpolate(std::span<const double> values, double place) {
    const double last = static_cast<double>(values.size() - 1);
    const double inside = std::clamp(place, 0.0, last);
    const auto below = std::min(static_cast<std::size_t>(inside), values.size() - 2);
    const double share = inside - static_cast<double>(below);
    return values[below] + share * (values[below + 1] - values[below]);
}

} // namespace

Scorer::Scorer()
    : m_calming_filter{
          LowPass::butterworth2(dual_pass_cutoff(k_calm_cutoff_hz), k_sample_rate_hz)} {}

/// Splits the samples of a movement into the parts along and across the task axis.
void Scorer::turn(std::span<const double> x, std::span<const double> y, const Axis& axis) {
    m_along.resize(x.size());
    m_across.resize(x.size());
    for (std::size_t i = 0; i < x.size(); ++i) {
        m_along[i] = x[i] * axis.cosine + y[i] * axis.sine;
        m_across[i] = y[i] * axis.cosine - x[i] * axis.sine;
    }
}

void Scorer::score_turns(const Path& path, const Axis& axis, double band, Scores& scores) {
    m_calm_x.assign(path.x_px.begin(), path.x_px.end());
    m_calm_y.assign(path.y_px.begin(), path.y_px.end());
    zero_phase(m_calming_filter, m_calm_x, m_calm_y);
    const std::size_t size = path.last - path.first + 1;
    turn({m_calm_x.data() + path.first, size}, {m_calm_y.data() + path.first, size}, axis);
    scores.axis_crossings = axis_crossings(m_across, band);
    scores.direction_changes = turning_points(m_across, band);
    scores.orthogonal_changes = turning_points(m_along, band);
}

/// Precondition: m_along and m_across hold the path, not the calmed one.
void Scorer::score_submovements(const Path& path, const Axis& axis, Scores& scores) {
    m_calm_x.assign(path.vx_mm_s.begin(), path.vx_mm_s.end());
    m_calm_y.assign(path.vy_mm_s.begin(), path.vy_mm_s.end());
    zero_phase(m_calming_filter, m_calm_x, m_calm_y);
    const std::size_t size = path.last - path.first + 1;
    m_along_velocity.resize(size);
    for (std::size_t i = 0; i < size; ++i) {
        m_along_velocity[i] =
            m_calm_x[path.first + i] * axis.cosine + m_calm_y[path.first + i] * axis.sine;
    }
    const Submovements pieces = find_submovements(m_along_velocity, k_least_prominence.value());
    scores.submovements = pieces.count;
    scores.primary_fraction = interpolate(m_along, pieces.primary_end) / scores.distance.value();
    scores.primary_lateral = Pixels::of(interpolate(m_across, pieces.primary_end));
}

void Scorer::score_smoothness(const Path& path, Scores& scores) {
    const std::span<const double> speed{path.speed_mm_s.data() + path.first,
                                        path.last - path.first + 1};
    m_thinned.clear();
    for (std::size_t i = 0; i < speed.size(); i += k_thinning) {
        m_thinned.push_back(speed[i]);
    }
    scores.smoothness_sparc = spectral_arc_length(m_thinned, k_sample_rate_hz / k_thinning);
    scores.smoothness_ldlj = log_dimensionless_jerk(speed);
}

Scores Scorer::score(const Path& path, const ScoreRules& rules) {
    Scores scores;
    const double distance = std::hypot(path.press_x_px, path.press_y_px);
    const Axis axis{path.press_x_px / distance, path.press_y_px / distance};
    const double direction = std::atan2(axis.sine, axis.cosine) * k_degrees_per_radian;
    scores.distance = Pixels::of(distance);
    // A direction just below 0 rounds up to 360, which is 0.
    const double turned = direction < 0.0 ? direction + 360.0 : direction;
    scores.direction = Degrees::of(turned < 360.0 ? turned : 0.0);
    scores.path = Pixels::of(path.length_px);
    scores.hand_travel = Millimetres::of(path.length_mm);
    scores.peak_speed = MillimetresPerSecond::of(path.peak_speed_mm_s);
    scores.time_to_peak = std::chrono::duration_cast<Micros>(path.peak_time - path.start);

    score_turns(path, axis, std::max(rules.dead_band.value(), rules.dead_band_share * distance),
                scores);

    const std::size_t size = path.last - path.first + 1;
    turn({path.x_px.data() + path.first, size}, {path.y_px.data() + path.first, size}, axis);
    const Deviation strayed = deviation(m_across);
    scores.error = strayed.error;
    scores.offset = strayed.offset;
    scores.variability = strayed.variability;
    scores.max_deviation = strayed.max_deviation;
    const double at_peak = path.peak_sample - static_cast<double>(path.first);
    scores.initial_angle =
        Degrees::of(std::atan2(interpolate(m_across, at_peak), interpolate(m_along, at_peak)) *
                    k_degrees_per_radian);

    score_submovements(path, axis, scores);
    score_smoothness(path, scores);
    return scores;
}

} // namespace sagitta::estimator
