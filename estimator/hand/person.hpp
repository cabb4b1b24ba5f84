// A person whose way of pointing is known: the truth that measures are held against.
#pragma once

#include "estimator/hand/random.hpp"
#include "estimator/units.hpp"

namespace sagitta::estimator::hand {

/// Distance at which Person::lateral_noise is the share of the distance.
constexpr Millimetres k_noise_distance = Millimetres::of(5.0);

/// How one person points. Shares of D are shares of the distance to the target. The defaults were
/// chosen so that a day at the Desk looks like everyday use computed from open recordings
/// (tests/bench/bench_likeness prints both).
struct Person {
    /// Movement-time law: MT = intercept + ID / index_of_performance, ID = log2(D/W + 1), W the
    /// true width of the target, dwell included. Source of the form: MacKenzie (1989).
    BitsPerSecond index_of_performance = BitsPerSecond::of(3.65);
    Micros intercept = std::chrono::milliseconds{310};
    double time_spread = 0.39;     ///< SD of log MT from movement to movement
    double session_spread = 0.055; ///< SD of log MT from session to session

    Micros dwell = std::chrono::milliseconds{130}; ///< median still time before a press
    double dwell_spread = 0.60;                    ///< SD of log dwell

    /// SD of the press around the target's centre, each axis, in units of W / 4.133 (at 1 about
    /// 4 % of the presses miss along the axis).
    double endpoint_spread = 0.9;
    double primary_undershoot = 0.04; ///< share of D by which the primary submovement falls short
    double primary_spread = 0.18;     ///< SD of its end along the axis, share of D
    double correction_spread = 0.25;  ///< SD of a correction's end, share of what it corrects

    /// SD of the random bow (height above the chord), share of D at k_noise_distance. The next
    /// three apply to the place of detours and the lateral end of strokes as well.
    double lateral_noise = 0.036;
    double lateral_spread = 0.50;         ///< SD of the log of the noise from movement to movement
    double lateral_growth = 0.75;         ///< noise ~ D to this power
    double lateral_session_spread = 0.15; ///< SD of the log of the noise from session to session
    double bow = 0.0;                     ///< systematic height, share of D, + = left of the axis

    /// Share of the movements that set out for somewhere else and are redirected in flight.
    double detour_share = 0.47;
    double detour_spread = 0.25; ///< SD of the detour's place, each axis, share of D

    Millimetres tremor_amplitude = Millimetres::of(0.024);
    double tremor_low_hz = 8.0, tremor_high_hz = 12.0; ///< drawn anew for each movement
};

/// A person drawn from a population whose middle is `middle`: the index of performance, the
/// intercept, the dwell and the noises vary between people (SDs of logs 0.12 to 0.3), the
/// systematic bow by 0.01 of D.
[[nodiscard]] Person draw_person(const Person& middle, std::uint64_t seed);

/// What holds for one session and moment: factors on the person's own figures.
struct Form {
    double performance = 1.0; ///< on the index of performance
    double lateral = 1.0;     ///< on lateral_noise
    double time = 1.0;        ///< on MT
};

/// The form of a new session, by the person's spreads between sessions.
[[nodiscard]] Form draw_form(const Person& person, Random& random);

} // namespace sagitta::estimator::hand
