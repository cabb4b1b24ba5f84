// The daemon's log: lines on standard error, with priorities when the journal reads them.
#pragma once

#include <memory>
#include <spdlog/logger.h>
#include <string>

namespace sagitta::daemon {

/// Standard error is a stream of the journal (systemd.exec(5), $JOURNAL_STREAM).
[[nodiscard]] bool stderr_is_journal();

/// @param level    "debug", "info", "warning", "error"
/// @param journal  lines begin with <priority> (sd-daemon(3)) instead of time and level
[[nodiscard]] std::shared_ptr<spdlog::logger> make_logger(const std::string& level, bool journal);

/// Precondition: a level that config::read_settings accepts.
void set_level(spdlog::logger& log, const std::string& level);

/// sd-daemon(3)'s priority of a level, e.g. 6 for info.
[[nodiscard]] int journal_priority(spdlog::level::level_enum level);

} // namespace sagitta::daemon
