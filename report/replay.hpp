// sagitta replay: recordings through the same pipeline as live pointers.
#pragma once

#include "estimator/gain.hpp"
#include "report/session.hpp"

#include <filesystem>
#include <vector>

namespace sagitta::report {

struct ReplayRequest {
    std::vector<std::filesystem::path> recordings;
    std::optional<std::string> pointer; ///< names the recording's first pointer
    std::optional<double> cpi;
    std::optional<double> gain;
    std::optional<std::string> start; ///< when the recording began
};

/// Replays one after the other; with a named store, movements are written as they are found. The
/// first recording that fails ends the run; the error tells what stays stored.
[[nodiscard]] Result<Output> run_replay(const ReplayRequest& request, const Session& session);

} // namespace sagitta::report
