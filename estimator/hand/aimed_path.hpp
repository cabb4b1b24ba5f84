// The continuous path of one movement: minimum-jerk submovements, a bow and a tremor, known at
// any time, so that the truth of every measure can be computed from it.
#pragma once

#include "estimator/hand/person.hpp"
#include "estimator/units.hpp"

#include <array>
#include <cstddef>

namespace sagitta::estimator::hand {

/// A place in the hand plane, mm, + = right and away from the person.
struct Point {
    double x_mm = 0.0;
    double y_mm = 0.0;
};

/// Progress of a minimum-jerk movement, 0 to 1: 10 s^3 - 15 s^4 + 6 s^5.
/// Source: Flash & Hogan (1985).
/// @param share  of its duration, clamped to [0, 1]
[[nodiscard]] inline double minimum_jerk(double share) noexcept {
    const double s = share < 0.0 ? 0.0 : (share > 1.0 ? 1.0 : share);
    return s * s * s * (10.0 + s * (-15.0 + 6.0 * s));
}

/// One stroke. Times count from the path's start.
struct Submovement {
    double start_s;
    double duration_s; ///< > 0
    Point by;          ///< displacement
    double bow_mm;     ///< height of its arc above the chord, + = left
    double bend_mm;    ///< height of its S-bend, + = left first
};

/// Involuntary oscillation while the hand moves: c cos + s sin in each axis.
struct Tremor {
    double frequency_hz = 10.0;
    Point cosine;
    Point sine;
};

/// Sum of submovements plus tremor; from rest to rest, then still until the press. Plain values,
/// no allocation.
class AimedPath {
public:
    static constexpr std::size_t k_max_submovements = 10;

    /// Precondition: fewer than k_max_submovements so far; submovement.duration_s > 0.
    void add(const Submovement& submovement) noexcept;
    void set_tremor(const Tremor& tremor) noexcept;
    /// Still time between the last motion and the press, s, >= 0.
    void set_dwell(double dwell_s) noexcept { m_dwell_s = dwell_s; }

    /// Displacement since the start. @param time_s  any; at rest before 0 and after motion_s()
    [[nodiscard]] Point position_at(double time_s) const noexcept;
    [[nodiscard]] double motion_s() const noexcept { return m_motion_s; }
    [[nodiscard]] double dwell_s() const noexcept { return m_dwell_s; }
    [[nodiscard]] double press_s() const noexcept { return m_motion_s + m_dwell_s; }
    /// Displacement from start to press.
    [[nodiscard]] Point end() const noexcept;
    [[nodiscard]] std::size_t submovements() const noexcept { return m_count; }

private:
    friend class PathWalk;
    /// Place at progress s: linear s + square s^2 + cube s^3. That is, displacement s, bow
    /// 4 s (1 - s) and S-bend 4 s (1 - s) (1 - 2 s) in one.
    struct Stroke {
        double start_s, rate_per_s;
        Point linear, square, cube;

        void add_to(Point& at, double s) const noexcept {
            at.x_mm += s * (linear.x_mm + s * (square.x_mm + s * cube.x_mm));
            at.y_mm += s * (linear.y_mm + s * (square.y_mm + s * cube.y_mm));
        }
    };
    /// Share of the tremor that shows: it grows and dies with the motion.
    [[nodiscard]] double tremor_envelope(double time_s) const noexcept {
        constexpr double k_ramp_s = 0.08;
        const double left_s = m_motion_s - time_s;
        if (time_s >= k_ramp_s && left_s >= k_ramp_s) {
            return 1.0;
        }
        return minimum_jerk(time_s / k_ramp_s) * minimum_jerk(left_s / k_ramp_s);
    }
    void add_tremor(Point& at, double cosine, double sine) const noexcept {
        at.x_mm += m_tremor.cosine.x_mm * cosine + m_tremor.sine.x_mm * sine;
        at.y_mm += m_tremor.cosine.y_mm * cosine + m_tremor.sine.y_mm * sine;
    }

    std::array<Stroke, k_max_submovements> m_strokes{};
    std::size_t m_count = 0;
    Tremor m_tremor;
    bool m_trembles = false;
    double m_motion_s = 0.0;
    double m_dwell_s = 0.0;
};

/// A path at equally spaced times, several times faster than position_at: what is over is summed
/// once, and the tremor turns by one rotation a step.
class PathWalk {
public:
    /// @param path  outlives the walk;  @param from_s, step_s  >= 0, > 0
    PathWalk(const AimedPath& path, double from_s, double step_s) noexcept;
    /// The position at from_s, then one step_s later with each call.
    [[nodiscard]] Point next() noexcept;

private:
    const AimedPath& m_path;
    double m_time_s, m_step_s;
    std::size_t m_first = 0; ///< strokes before it are over
    Point m_over;            ///< their sum
    double m_cosine, m_sine; ///< of the tremor's angle
    double m_turn_cosine, m_turn_sine;
};

/// What the hand is asked to do.
struct AimTask {
    Millimetres distance; ///< to the target's centre, hand plane, > 0
    Degrees direction;    ///< 0 = right, 90 = away from the person
    Millimetres width;    ///< of the target, > 0
};

/// A movement of `person` to the target. Its time is drawn about the movement-time law; its
/// primary submovement misses by the person's spread, and corrections follow until the target is
/// reached, at most 6.
[[nodiscard]] AimedPath aim(const Person& person, const Form& form, const AimTask& task,
                            Random& random);

/// Mean movement time of the law, s.
[[nodiscard]] double lawful_time_s(const Person& person, const Form& form,
                                   const AimTask& task) noexcept;

/// A movement to nowhere in particular: `legs` strokes of about `leg_distance` each, without rest,
/// without a press. @param legs  1 to k_max_submovements
[[nodiscard]] AimedPath wander(const Person& person, const Form& form, std::size_t legs,
                               Millimetres leg_distance, Random& random);

inline Point PathWalk::next() noexcept {
    Point at = m_over;
    for (std::size_t i = m_first; i < m_path.m_count; ++i) {
        const AimedPath::Stroke& stroke = m_path.m_strokes[i];
        const double share = (m_time_s - stroke.start_s) * stroke.rate_per_s;
        if (share <= 0.0) {
            continue;
        }
        stroke.add_to(at, minimum_jerk(share));
        if (share >= 1.0 && i == m_first) {
            ++m_first;
            stroke.add_to(m_over, 1.0);
        }
    }
    if (m_path.m_trembles) {
        const double envelope = m_path.tremor_envelope(m_time_s);
        m_path.add_tremor(at, envelope * m_cosine, envelope * m_sine);
        const double cosine = m_cosine * m_turn_cosine - m_sine * m_turn_sine;
        m_sine = m_sine * m_turn_cosine + m_cosine * m_turn_sine;
        m_cosine = cosine;
    }
    m_time_s += m_step_s;
    return at;
}

} // namespace sagitta::estimator::hand
