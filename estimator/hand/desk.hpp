// Days of desk work by a simulated hand, as reports: the third source beside live pointers and
// recordings.
#pragma once

#include "estimator/hand/device.hpp"
#include "estimator/movement.hpp"
#include "estimator/report_source.hpp"

#include <chrono>
#include <cstdint>
#include <memory>
#include <span>
#include <vector>

namespace sagitta::estimator::hand {

/// A pointer of the desk, and what it does to the person.
struct DeskPointer {
    PointerDescription description; ///< origin and CPI are filled in by the desk
    Electronics electronics;
    double gain = 1.0; ///< flat, px per count
    Form effect; ///< e.g. performance 0.9: a tenth fewer bits per second than the person's own
};

/// Targets of everyday work: distances and widths are log-normal, independent of each other.
struct TargetMix {
    Pixels distance = Pixels::of(190.0); ///< median
    double distance_spread = 1.0;        ///< SD of the log
    Pixels width = Pixels::of(34.0);     ///< median
    double width_spread = 0.55;          ///< SD of the log
};

/// Shares of what the hand does next, between pauses. What is left of 1 is a plain aimed click.
struct ActivityMix {
    double wander = 0.16;       ///< moves and stops without a press
    double long_wander = 0.012; ///< roams for many seconds
    double wheel = 0.10;
    double drag = 0.035;
    double double_click = 0.07;
    double short_move = 0.13;  ///< a press within a few px of the last one
    double still_press = 0.06; ///< a press without motion
    double slow_press = 0.03;  ///< takes over four seconds to arrive
    double long_dwell = 0.06;  ///< arrives, reads on, then presses
    double clutch = 0.03;      ///< a long aimed movement with the device lifted half-way
};

/// Change of the person over hours and days, as factors on movement time.
struct Course {
    double fatigue = 0.0;       ///< log increase of MT over eight hours of a day
    double practice = 0.0;      ///< log excess of MT on a pointer's first day
    double practice_days = 5.0; ///< days of its use in which the excess falls to 1/e
    double day_noise = 0.0;     ///< SD of log MT from day to day, beside that of sessions
};

struct DeskPlan {
    std::uint64_t seed = 1;
    Person person;
    std::vector<DeskPointer> pointers; ///< at least one
    /// Pointer of each half-day in turn, over working days only; repeats when it ends. Empty: the
    /// first pointer always.
    std::vector<PointerIndex> half_days;

    std::chrono::sys_days first_day =
        std::chrono::sys_days{std::chrono::days{20458}}; ///< 2026-01-05
    int days = 5;                                        ///< calendar days, weekends included
    bool weekends = false;
    Micros utc_offset{}; ///< local time = UTC + this
    Micros morning_start = std::chrono::minutes{8 * 60 + 30};
    Micros morning_end = std::chrono::hours{12};
    Micros afternoon_start = std::chrono::hours{13};
    Micros afternoon_end = std::chrono::hours{17};

    TargetMix targets;
    ActivityMix activities;
    Course course;
    Micros reading = std::chrono::milliseconds{2500}; ///< median pause between activities
    double reading_spread = 1.3;                      ///< SD of its log
    bool keep_truths = false;                         ///< collect for take_truths()
};

/// The truth of a movement that aimed at a target. Movements interrupted by lifting the device and
/// presses without motion have none.
struct AimedTruth {
    PointerIndex pointer;
    MovementKind kind;
    PointerTime start; ///< of the motion
    PointerTime press; ///< for a drag, its release
    Pixels distance;   ///< D, from the start to the press, screen plane
    Pixels width;      ///< of the target
};

/// Generates reports movement by movement, so memory does not grow with the days. Stamps are UTC
/// microseconds since 1970: ClockOffset{0} makes them UTC.
class Desk final : public ReportSource {
public:
    /// @return ErrorCode::bad_value when the plan has no pointer, a schedule that names an unknown
    ///         one, or a figure out of its range
    [[nodiscard]] static Result<std::unique_ptr<Desk>> make(DeskPlan plan);
    ~Desk() override;

    /// At most k_max_batch reports.
    [[nodiscard]] Result<void> next(ReportBatch& batch) override;
    [[nodiscard]] std::span<const PointerDescription> pointers() const override;

    static constexpr std::size_t k_max_batch = 16384;

    /// The truths of the movements begun since the last call, when the plan keeps them.
    [[nodiscard]] std::vector<AimedTruth> take_truths();
    /// UTC moment that the desk has reached; for progress.
    [[nodiscard]] UtcTime now() const;
    /// First and last moment of the plan.
    [[nodiscard]] UtcTime begin() const;
    [[nodiscard]] UtcTime end() const;
    [[nodiscard]] const DeskPlan& plan() const;

private:
    struct State;
    explicit Desk(std::unique_ptr<State> state);
    std::unique_ptr<State> m_state;
};

/// The map room of a county archive, where one desk tries an upright mouse (pointer 0) against a
/// thumb trackball (pointer 1): working days in randomised, balanced pairs. On the trackball the
/// person has 7 % fewer bits per second and a fifth more lateral noise; on either, the first days
/// go a little slower than the later ones, and afternoons than mornings.
/// @param weeks  >= 1;  @param first_day  a Monday, so that weeks are whole
[[nodiscard]] DeskPlan map_room_desk(std::uint64_t seed, int weeks,
                                     std::chrono::sys_days first_day);

} // namespace sagitta::estimator::hand
