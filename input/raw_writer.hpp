// Writes reports as a raw stream of struct input_event: what `sagitta record` makes, and what
// replays of simulated hands are made of.
#pragma once

#include "estimator/report.hpp"
#include "estimator/result.hpp"

#include <filesystem>
#include <memory>
#include <span>

namespace sagitta::input {

class RawWriter {
public:
    /// Creates the file (mode 0600). @return already_there when it exists, no_permission, io
    [[nodiscard]] static estimator::Result<RawWriter> create(const std::filesystem::path& file);
    RawWriter(RawWriter&&) noexcept;
    RawWriter& operator=(RawWriter&&) noexcept;
    ~RawWriter();

    /// Appends reports; each becomes REL_X, REL_Y, REL_WHEEL_HI_RES and EV_KEY events as needed
    /// and a SYN_REPORT, stamped with its time in UTC. A report after a loss is preceded by
    /// SYN_DROPPED and a SYN_REPORT.
    /// @return no_space, io
    [[nodiscard]] estimator::Result<void> write(std::span<const estimator::Report> reports,
                                                estimator::ClockOffset clock);
    /// Flushes and closes. @return no_space, io
    [[nodiscard]] estimator::Result<void> close();

private:
    struct State;
    explicit RawWriter(std::unique_ptr<State> state);
    std::unique_ptr<State> m_state;
};

} // namespace sagitta::input
