#include "estimator/pipeline.hpp"

#include "estimator/motion_grid.hpp"
#include "estimator/path.hpp"
#include "estimator/scorer.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdlib>
#include <limits>
#include <utility>

namespace sagitta::estimator {
namespace {

// Before any stamp, yet far enough from the ends of the scale for differences not to overflow.
constexpr PointerTime k_never{Micros{std::numeric_limits<Micros::rep>::min() / 4}};

// A run may last this many times the longest movement before it counts as wandering.
constexpr int k_run_span_factor = 2;
constexpr int k_unseen_steps = 4;

struct Displacement {
    double x_px;
    double y_px;
};

/// What has happened at one pointer since its last break, and what must be remembered across it.
struct PointerRun {
    PointerRun(const Calibration& calibration_in, Micros span)
        : calibration{calibration_in}, grid{span} {}

    Calibration calibration;
    MotionGrid grid;
    /// How much of a still gap may be slow motion that a coarse sensor does not show. A hand that
    /// comes to rest by minimum jerk covers its last half step in about twice the time of the step
    /// before; setting out is alike, so a gap hides up to four such times.
    [[nodiscard]] Micros unseen() const {
        const Micros step = (last_motion - motion_before) / std::max(last_counts, 1);
        return std::min(k_unseen_steps * step, k_longest_ramp);
    }

    ButtonSet held = 0;
    bool lost = false;      ///< reports are missing since the last rest or press
    bool wandering = false; ///< the run outgrew the grid
    bool started_in_motion = false;
    // Of a wandering run, what has left the grid.
    PointerTime wander_start{};
    Millimetres wander_travel = Millimetres::zero();
    std::uint32_t wander_reports = 0;

    PointerTime last_motion = k_never;
    PointerTime motion_before = k_never; ///< the motion report before the last
    std::int32_t last_counts = 1;        ///< of the last motion report, the larger axis
    PointerTime last_press = k_never;
    Displacement since_press{0.0, 0.0};
};

bool moves(const Report& report) {
    return report.dx != 0 || report.dy != 0;
}

bool is_only_motion(const Report& report) {
    return moves(report) &&
           (report.pressed | report.released | report.wheel_120ths | report.after_loss) == 0;
}

/// How many reports from the first on are one pointer's motion without a rest between. The last of
/// them may also hold a button edge or a wheel step.
std::size_t plain_motion(std::span<const Report> reports, Micros rest) {
    std::size_t count = 1;
    while (count < reports.size() && is_only_motion(reports[count - 1])) {
        const Report& before = reports[count - 1];
        const Report& next = reports[count];
        const Micros gap = next.time - before.time;
        if (next.pointer != before.pointer || next.after_loss || !moves(next) || gap >= rest ||
            gap < Micros::zero()) {
            break;
        }
        ++count;
    }
    return count;
}

FlagSet flag(Flag value) {
    return static_cast<FlagSet>(value);
}

} // namespace

struct Pipeline::State {
    State(const Rules& rules_in, MovementSink& sink_in) : rules{rules_in}, sink{&sink_in} {}

    Rules rules;
    MovementSink* sink;
    std::array<std::unique_ptr<PointerRun>, k_max_pointers> runs;
    std::size_t mover = 0; ///< the pointer that moved last
    PathBuilder builder;
    Scorer scorer;

    std::size_t take(std::span<const Report> reports);
    void begin_motion(PointerIndex pointer, PointerRun& run, PointerTime time);
    void take_motion(PointerRun& run, std::span<const Report> reports);
    void take_buttons(PointerIndex pointer, PointerRun& run, const Report& report);
    void press(PointerIndex pointer, PointerRun& run, PointerTime time, Button button);
    void release(PointerIndex pointer, PointerRun& run, PointerTime time, Button button);

    void outgrow(PointerRun& run);
    const Path* build_path(PointerRun& run);
    Outcome judge(const PointerRun& run, const Path* path, PointerTime time) const;
    void emit(PointerIndex pointer, PointerRun& run, const Path& path, MovementKind kind,
              Button button, PointerTime time);
    void close(PointerIndex pointer, PointerRun& run, const Path* path, PointerTime time,
               Outcome outcome);
    void break_off(PointerIndex pointer, PointerRun& run, Outcome outcome);
};

Pipeline::Pipeline(const Rules& rules, MovementSink& sink)
    : m_state{std::make_unique<State>(rules, sink)} {}
Pipeline::~Pipeline() = default;
Pipeline::Pipeline(Pipeline&&) noexcept = default;
Pipeline& Pipeline::operator=(Pipeline&&) noexcept = default;

void Pipeline::set_pointer(PointerIndex pointer, const Calibration& calibration) {
    interrupt(pointer);
    const Micros span = k_run_span_factor * m_state->rules.segmentation.max_movement_time;
    m_state->runs[static_cast<std::size_t>(pointer)] =
        std::make_unique<PointerRun>(calibration, span);
}

void Pipeline::process(std::span<const Report> reports) {
    while (!reports.empty()) {
        reports = reports.subspan(m_state->take(reports));
    }
}

void Pipeline::interrupt(PointerIndex pointer) {
    const auto& run = m_state->runs[static_cast<std::size_t>(pointer)];
    if (run) {
        m_state->break_off(pointer, *run, Outcome::interrupted);
        run->held = 0;
        run->lost = false;
    }
}

void Pipeline::finish() {
    for (std::size_t i = 0; i < k_max_pointers; ++i) {
        if (m_state->runs[i]) {
            m_state->break_off(static_cast<PointerIndex>(i), *m_state->runs[i], Outcome::no_press);
        }
    }
}

void Pipeline::set_rules(const Rules& rules) {
    const bool same_span =
        rules.segmentation.max_movement_time == m_state->rules.segmentation.max_movement_time;
    m_state->rules = rules;
    if (same_span) {
        return;
    }
    // The runs' buffers are sized by the longest movement.
    for (std::size_t i = 0; i < k_max_pointers; ++i) {
        if (m_state->runs[i]) {
            const Calibration calibration = m_state->runs[i]->calibration;
            set_pointer(static_cast<PointerIndex>(i), calibration);
        }
    }
}

/// Takes the first report, and with it those that only go on with its motion.
/// @return how many were taken, >= 1
std::size_t Pipeline::State::take(std::span<const Report> reports) {
    const Report& report = reports.front();
    PointerRun* const run = runs[static_cast<std::size_t>(report.pointer)].get();
    if (run == nullptr) {
        return 1;
    }
    if (report.after_loss || report.time < run->last_motion) {
        break_off(report.pointer, *run, Outcome::lost_reports);
        run->held = 0;
        run->lost = true;
        run->last_motion = report.time;
        run->last_press = k_never;
    }
    std::size_t taken = 1;
    if (moves(report)) {
        begin_motion(report.pointer, *run, report.time);
        taken = plain_motion(reports, rules.segmentation.rest);
        take_motion(*run, reports.first(taken));
    }
    // Only the last one taken may hold more than motion.
    const Report& last = reports[taken - 1];
    if (last.wheel_120ths != 0) {
        break_off(last.pointer, *run, Outcome::no_press);
        sink->on_wheel(last.pointer, last.time, last.wheel_120ths);
    }
    if ((last.pressed | last.released) != 0) {
        take_buttons(last.pointer, *run, last);
    }
    return taken;
}

/// Breaks that come with a motion report: another pointer's run, or a rest before.
void Pipeline::State::begin_motion(PointerIndex pointer, PointerRun& run, PointerTime time) {
    if (mover != static_cast<std::size_t>(pointer)) {
        if (runs[mover]) {
            break_off(static_cast<PointerIndex>(mover), *runs[mover], Outcome::no_press);
        }
        mover = static_cast<std::size_t>(pointer);
    }
    const Micros gap = time - run.last_motion;
    const bool rested =
        gap >= rules.segmentation.rest && gap >= rules.segmentation.rest + run.unseen();
    if (rested) {
        break_off(pointer, run, Outcome::no_press);
        run.lost = false;
    }
    if (run.grid.empty()) {
        run.started_in_motion = !rested;
    }
}

void Pipeline::State::take_motion(PointerRun& run, std::span<const Report> reports) {
    const Report& last = reports.back();
    run.motion_before = reports.size() > 1 ? reports[reports.size() - 2].time : run.last_motion;
    run.last_counts = std::max(std::abs(last.dx), std::abs(last.dy));
    run.last_motion = last.time;
    while (!reports.empty()) {
        reports = reports.subspan(run.grid.add(reports));
        if (!reports.empty()) {
            outgrow(run);
        }
    }
}

void Pipeline::State::take_buttons(PointerIndex pointer, PointerRun& run, const Report& report) {
    for (unsigned bit = 1; bit < 256; bit <<= 1) {
        if ((report.released & bit) != 0 && (run.held & bit) != 0) {
            run.held = static_cast<ButtonSet>(run.held & ~bit);
            release(pointer, run, report.time, static_cast<Button>(bit));
        }
    }
    for (unsigned bit = 1; bit < 256; bit <<= 1) {
        if ((report.pressed & bit) != 0) {
            press(pointer, run, report.time, static_cast<Button>(bit));
            run.held = static_cast<ButtonSet>(run.held | bit);
        }
    }
}

void Pipeline::State::press(PointerIndex pointer, PointerRun& run, PointerTime time,
                            Button button) {
    sink->on_press(pointer, time, button);
    const Path* const path = build_path(run);
    Displacement moved = run.since_press;
    if (path != nullptr) {
        moved.x_px += path->press_x_px;
        moved.y_px += path->press_y_px;
    }
    const SegmentationRules& segmentation = rules.segmentation;
    const bool repeats = run.last_press != k_never &&
                         time - run.last_press <= segmentation.repeat_time &&
                         std::hypot(moved.x_px, moved.y_px) <= segmentation.repeat_distance.value();
    Outcome outcome = Outcome::scored_click;
    if (run.held != 0) {
        outcome = Outcome::other_button_down;
    } else if (repeats) {
        outcome = Outcome::repeat_press;
    } else {
        outcome = judge(run, path, time);
    }
    if (outcome == Outcome::scored_click) {
        emit(pointer, run, *path, MovementKind::click, button, time);
    }
    close(pointer, run, path, time, outcome);
    run.last_press = time;
    run.since_press = {0.0, 0.0};
}

void Pipeline::State::release(PointerIndex pointer, PointerRun& run, PointerTime time,
                              Button button) {
    const Path* const path = build_path(run);
    if (path == nullptr) {
        return;
    }
    const bool drag = run.wandering || path->length_px >= rules.segmentation.drag_distance.value();
    Outcome outcome = Outcome::no_press;
    if (drag && run.held != 0) {
        outcome = Outcome::other_button_down;
    } else if (drag) {
        outcome = judge(run, path, time);
    }
    if (outcome == Outcome::scored_click) {
        outcome = Outcome::scored_drag;
        emit(pointer, run, *path, MovementKind::drag, button, time);
    }
    close(pointer, run, path, time, outcome);
}

// The run is longer than its buffer: what is in there only counts as exposure.
void Pipeline::State::outgrow(PointerRun& run) {
    const Path* const path = build_path(run);
    if (!run.wandering) {
        run.wandering = true;
        run.wander_start = run.grid.first_motion();
    }
    run.wander_reports += run.grid.reports();
    if (path != nullptr) {
        run.wander_travel += Millimetres::of(path->length_mm);
        run.since_press.x_px += path->press_x_px;
        run.since_press.y_px += path->press_y_px;
    }
    run.grid.clear();
}

/// The path of what is in the grid; null when that is empty.
const Path* Pipeline::State::build_path(PointerRun& run) {
    if (run.grid.empty()) {
        return nullptr;
    }
    const MotionGrid::Samples samples = run.grid.samples();
    return &builder.build(samples.x, samples.y, run.grid.origin(), run.calibration);
}

/// What becomes of a run that a press, or the release of a drag, closes; scored_click: score it.
Outcome Pipeline::State::judge(const PointerRun& run, const Path* path, PointerTime time) const {
    const SegmentationRules& segmentation = rules.segmentation;
    if (run.lost) {
        return Outcome::lost_reports;
    }
    if (run.wandering) {
        return Outcome::wandering;
    }
    if (path == nullptr) {
        return Outcome::no_motion;
    }
    if (time - run.grid.last_motion() > segmentation.max_dwell) {
        return Outcome::long_dwell;
    }
    if (path->peak_speed_mm_s <= 0.0 ||
        std::hypot(path->press_x_px, path->press_y_px) < segmentation.min_distance.value()) {
        return Outcome::too_short;
    }
    if (time - path->start > segmentation.max_movement_time) {
        return Outcome::too_slow;
    }
    return Outcome::scored_click;
}

void Pipeline::State::emit(PointerIndex pointer, PointerRun& run, const Path& path,
                           MovementKind kind, Button button, PointerTime time) {
    Scores scores = scorer.score(path, rules.scores);
    scores.movement_time = time - path.start;
    scores.dwell = time - run.grid.last_motion();
    scores.reports = run.grid.reports();
    if (run.calibration.cpi_source == CpiSource::assumed) {
        scores.flags |= flag(Flag::cpi_assumed);
    }
    if (run.started_in_motion) {
        scores.flags |= flag(Flag::started_in_motion);
    }
    sink->on_movement(Movement{pointer, kind, button, path.start, time, scores});
}

void Pipeline::State::close(PointerIndex pointer, PointerRun& run, const Path* path,
                            PointerTime time, Outcome outcome) {
    Exposure exposure{pointer, time, outcome};
    exposure.reports = run.wander_reports + run.grid.reports();
    exposure.hand_travel = run.wander_travel;
    if (path != nullptr) {
        exposure.hand_travel += Millimetres::of(path->length_mm);
        exposure.active =
            run.grid.last_motion() - (run.wandering ? run.wander_start : run.grid.first_motion());
        run.since_press.x_px += path->press_x_px;
        run.since_press.y_px += path->press_y_px;
    }
    sink->on_exposure(exposure);
    run.grid.clear();
    run.lost = false;
    run.wandering = false;
    run.wander_travel = Millimetres::zero();
    run.wander_reports = 0;
}

/// Ends a run without a press. Nothing happens when the pointer has not moved since its last break.
void Pipeline::State::break_off(PointerIndex pointer, PointerRun& run, Outcome outcome) {
    const Path* const path = build_path(run);
    if (path == nullptr) {
        return;
    }
    if (run.lost && outcome == Outcome::no_press) {
        outcome = Outcome::lost_reports;
    } else if (run.wandering && outcome == Outcome::no_press) {
        outcome = Outcome::wandering;
    }
    close(pointer, run, path, run.grid.last_motion(), outcome);
}

} // namespace sagitta::estimator
