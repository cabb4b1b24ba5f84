// A scored movement, and the reasons for which others are left out.
#pragma once

#include "estimator/report.hpp"
#include "estimator/units.hpp"

#include <array>
#include <cstdint>
#include <string_view>

namespace sagitta::estimator {

enum class MovementKind : std::uint8_t { click, drag };

/// Remarks on a movement, as bits.
enum class Flag : std::uint8_t {
    cpi_assumed = 1 << 0,      ///< lengths and speeds in mm rest on an assumed CPI
    started_in_motion = 1 << 1 ///< the run began at a break other than a rest
};
using FlagSet = std::uint8_t;

/// Every measure of one movement. Lengths in px live in the screen plane, in mm in the hand plane.
/// Formulas and sources stand with the functions that compute them.
struct Scores {
    Pixels distance = Pixels::zero();    ///< D
    Degrees direction = Degrees::zero(); ///< 0 = right, 90 = away from the person, [0, 360)
    Micros movement_time{};              ///< MT, dwell included
    Micros dwell{};                      ///< last motion report to press
    Pixels path = Pixels::zero();        ///< L
    Pixels error = Pixels::zero();       ///< ME
    Pixels offset = Pixels::zero();      ///< MO, + = left of the task axis
    Pixels variability = Pixels::zero(); ///< MV
    Pixels max_deviation = Pixels::zero();
    std::uint16_t axis_crossings = 0;     ///< TAC
    std::uint16_t direction_changes = 0;  ///< MDC
    std::uint16_t orthogonal_changes = 0; ///< ODC
    MillimetresPerSecond peak_speed = MillimetresPerSecond::zero();
    Micros time_to_peak{};
    std::uint16_t submovements = 0;
    double primary_fraction = 0.0;           ///< of D, along the task axis
    Pixels primary_lateral = Pixels::zero(); ///< across the task axis, + = left
    Degrees initial_angle = Degrees::zero(); ///< + = left of the task axis, (-180, 180]
    double smoothness_sparc = 0.0;           ///< <= 0, dimensionless
    double smoothness_ldlj = 0.0;            ///< dimensionless
    Millimetres hand_travel = Millimetres::zero();
    std::uint32_t reports = 0; ///< motion reports
    FlagSet flags = 0;

    [[nodiscard]] double path_ratio() const noexcept { return path / distance; }
};

struct Movement {
    PointerIndex pointer;
    MovementKind kind;
    Button button;
    PointerTime start;
    PointerTime press; ///< of the button; for a drag, its release
    Scores scores;
};

/// What became of a run of motion or of a press. Every press and every run ends as exactly one.
enum class Outcome : std::uint8_t {
    scored_click,
    scored_drag,
    repeat_press,      ///< soon after and near the last press
    other_button_down, ///< another button was held
    no_motion,         ///< pressed without moving since the last break
    too_short,         ///< distance below the minimum
    too_slow,          ///< movement time above the maximum
    long_dwell,        ///< stood still too long before the press
    wandering,         ///< outgrew the buffer
    lost_reports,      ///< the kernel dropped reports, or a stamp or a delta was impossible
    interrupted,       ///< the pointer vanished or recording was paused
    no_press           ///< came to rest or was broken off without a press
};
constexpr std::size_t k_outcomes = 12;
using OutcomeCounts = std::array<std::uint64_t, k_outcomes>;

/// The outcome's name in stores, exports and JSON, e.g. "repeat_press".
[[nodiscard]] std::string_view to_text(Outcome outcome);
/// The outcome for people, e.g. "repeat press (double click)".
[[nodiscard]] std::string_view explain(Outcome outcome);
/// "click" or "drag".
[[nodiscard]] std::string_view to_text(MovementKind kind);
/// "left", "right", "middle", "side", "extra", "forward", "back", "task" or "none".
[[nodiscard]] std::string_view to_text(Button button);

/// What a run of motion, or a press or wheel step without one, asked of the hand; scored or not.
struct Exposure {
    PointerIndex pointer;
    PointerTime time; ///< end of the run
    Outcome outcome;
    /// From the first to the last motion report of the run.
    Micros active{};
    Millimetres hand_travel = Millimetres::zero();
    std::uint32_t reports = 0; ///< motion reports
};

} // namespace sagitta::estimator
