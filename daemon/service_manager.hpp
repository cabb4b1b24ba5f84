// What the daemon tells systemd. Silent where NOTIFY_SOCKET is not set.
#pragma once

#include <chrono>
#include <optional>
#include <string>

namespace sagitta::daemon {

class ServiceManager {
public:
    /// @param status  one line for `systemctl status`
    static void ready(const std::string& status);
    /// A reload has begun; ready() ends it.
    static void reloading();
    static void stopping();
    static void alive();
    /// How often systemd wants to hear alive(); nothing when it does not.
    [[nodiscard]] static std::optional<std::chrono::microseconds> watchdog();
};

} // namespace sagitta::daemon
