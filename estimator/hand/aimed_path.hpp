// The continuous path of one movement: minimum-jerk submovements, a bow and a tremor, known at
// any time, so that the truth of every measure can be computed from it.
#pragma once

#include "estimator/hand/person.hpp"
#include "estimator/units.hpp"

#include <array>
#include <cmath>
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
/// no allocation; position_at costs some 10 ns a submovement.
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
    struct Stroke {
        double start_s, rate_per_s;
        Point by, bow, bend;
    };
    std::array<Stroke, k_max_submovements> m_strokes{};
    std::size_t m_count = 0;
    Tremor m_tremor;
    bool m_trembles = false;
    double m_motion_s = 0.0;
    double m_dwell_s = 0.0;
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

inline Point AimedPath::position_at(double time_s) const noexcept {
    Point at;
    for (std::size_t i = 0; i < m_count; ++i) {
        const Stroke& stroke = m_strokes[i];
        const double s = minimum_jerk((time_s - stroke.start_s) * stroke.rate_per_s);
        const double arc = 4.0 * s * (1.0 - s);
        const double bend = arc * (1.0 - 2.0 * s);
        at.x_mm += stroke.by.x_mm * s + stroke.bow.x_mm * arc + stroke.bend.x_mm * bend;
        at.y_mm += stroke.by.y_mm * s + stroke.bow.y_mm * arc + stroke.bend.y_mm * bend;
    }
    if (m_trembles && time_s > 0.0 && time_s < m_motion_s) {
        constexpr double k_two_pi = 6.283185307179586;
        constexpr double k_ramp_per_s = 1.0 / 0.08;
        const double envelope = minimum_jerk(time_s * k_ramp_per_s) *
                                minimum_jerk((m_motion_s - time_s) * k_ramp_per_s);
        const double angle = k_two_pi * m_tremor.frequency_hz * time_s;
        const double c = envelope * std::cos(angle);
        const double s = envelope * std::sin(angle);
        at.x_mm += m_tremor.cosine.x_mm * c + m_tremor.sine.x_mm * s;
        at.y_mm += m_tremor.cosine.y_mm * c + m_tremor.sine.y_mm * s;
    }
    return at;
}

} // namespace sagitta::estimator::hand
