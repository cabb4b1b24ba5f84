// The loop of sagittad: pointers, hot-plug, signals, timers, control socket and systemd around one
// recording session. One thread.
#pragma once

#include "config/settings.hpp"
#include "estimator/result.hpp"
#include "store/store.hpp"

#include <filesystem>
#include <memory>
#include <optional>
#include <spdlog/logger.h>

namespace sagitta::daemon {

class Daemon {
public:
    /// @param config_file  read again on SIGHUP; nothing: the defaults hold
    /// @param opened       the store, for writing
    /// @param log          outlives the daemon
    Daemon(config::Settings settings, std::optional<std::filesystem::path> config_file,
           store::Opened opened, spdlog::logger& log);
    ~Daemon();
    Daemon(const Daemon&) = delete;
    Daemon& operator=(const Daemon&) = delete;

    /// Records until SIGTERM or SIGINT, then writes what is left.
    /// @return busy when another daemon records already; the control socket's and the last
    ///         writing's errors
    [[nodiscard]] estimator::Result<void> run();

private:
    struct State;
    std::unique_ptr<State> m_state;
};

} // namespace sagitta::daemon
