#include "daemon/service_manager.hpp"

#include <cstdint>
#include <ctime>
#include <systemd/sd-daemon.h>

namespace sagitta::daemon {

void ServiceManager::ready(const std::string& status) {
    sd_notify(0, ("READY=1\nSTATUS=" + status).c_str());
}

void ServiceManager::reloading() {
    timespec now{};
    clock_gettime(CLOCK_MONOTONIC, &now);
    const std::int64_t stamp_us = std::int64_t{now.tv_sec} * 1'000'000 + now.tv_nsec / 1000;
    sd_notify(0, ("RELOADING=1\nMONOTONIC_USEC=" + std::to_string(stamp_us)).c_str());
}

void ServiceManager::stopping() {
    sd_notify(0, "STOPPING=1\nSTATUS=Writing what is left");
}

void ServiceManager::alive() {
    sd_notify(0, "WATCHDOG=1");
}

std::optional<std::chrono::microseconds> ServiceManager::watchdog() {
    std::uint64_t wanted_us = 0;
    if (sd_watchdog_enabled(0, &wanted_us) <= 0) {
        return std::nullopt;
    }
    return std::chrono::microseconds{static_cast<std::int64_t>(wanted_us)};
}

} // namespace sagitta::daemon
