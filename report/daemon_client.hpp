// Talks to a running sagittad over its control socket: one line out, one line of JSON back.
#pragma once

#include "report/session.hpp"

#include <filesystem>
#include <nlohmann/json_fwd.hpp>
#include <string>

namespace sagitta::report {

/// $XDG_RUNTIME_DIR/sagitta/control; empty when that variable is not set.
[[nodiscard]] std::filesystem::path control_socket();

/// @param request  e.g. "status", without newline
/// @return the daemon's answer; not_found when no daemon listens, no_permission, io; bad_value
///         with the daemon's own words when it refuses
[[nodiscard]] Result<nlohmann::json> ask_daemon(const std::string& request);

enum class DaemonOrder { status, pause, resume, label };

/// sagitta status, pause, resume and label. @param label  DaemonOrder::label only
[[nodiscard]] Result<Output> run_daemon_order(DaemonOrder order, const std::string& label,
                                              const Session& session);

} // namespace sagitta::report
