// From reports to scored movements, streaming, in bounded memory: one run per pointer, closed by a
// press or a break, scored or counted by the reason it was left out.
#pragma once

#include "estimator/calibration.hpp"
#include "estimator/movement.hpp"
#include "estimator/report.hpp"
#include "estimator/rules.hpp"

#include <memory>
#include <span>

namespace sagitta::estimator {

/// Takes what the pipeline finds. Calls come in the order of time per pointer.
class MovementSink {
public:
    MovementSink() = default;
    MovementSink(const MovementSink&) = delete;
    MovementSink& operator=(const MovementSink&) = delete;
    virtual ~MovementSink() = default;

    /// A scored movement; an on_exposure with its outcome follows.
    virtual void on_movement(const Movement& movement) = 0;
    /// A run ended, or a press without a run; `exposure.outcome` says how.
    virtual void on_exposure(const Exposure& exposure) = 0;
    /// A button went down.
    virtual void on_press(PointerIndex pointer, PointerTime time, Button button) = 0;
    /// A wheel turned.
    virtual void on_wheel(PointerIndex pointer, PointerTime time, std::uint32_t steps_120ths) = 0;
};

class Pipeline {
public:
    /// @param sink  outlives the pipeline
    Pipeline(const Rules& rules, MovementSink& sink);
    ~Pipeline();
    Pipeline(Pipeline&&) noexcept;
    Pipeline& operator=(Pipeline&&) noexcept;

    /// Makes a pointer known, or gives it a new calibration; a run in progress is interrupted.
    /// Must precede the pointer's first report.
    void set_pointer(PointerIndex pointer, const Calibration& calibration);
    /// Feeds reports in the order of time.
    void process(std::span<const Report> reports);
    /// Ends a pointer's run as Outcome::interrupted and forgets its held buttons (unplugged,
    /// paused, machine asleep).
    void interrupt(PointerIndex pointer);
    /// Ends all runs as Outcome::no_press: the input is over.
    void finish();
    /// New rules from now on; runs in progress are judged by them.
    void set_rules(const Rules& rules);

private:
    struct State;
    std::unique_ptr<State> m_state;
};

} // namespace sagitta::estimator
