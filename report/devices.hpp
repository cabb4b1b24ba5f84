// sagitta devices: the pointers of this machine and those of the store.
#pragma once

#include "input/evdev_pointers.hpp"
#include "report/session.hpp"

#include <vector>

namespace sagitta::report {

/// A pointer of this machine as Sagitta sees it.
struct DeviceHere {
    input::PointerNode node;
    estimator::Cpi cpi;
    estimator::CpiSource cpi_source;
    bool ignored; ///< by the config
};

struct DeviceList {
    std::vector<DeviceHere> here;
    std::vector<store::StoredPointer> stored;
    bool store_found = false;
};

/// Adds what the config says to the pointers found.
[[nodiscard]] std::vector<DeviceHere> describe_devices(std::vector<input::PointerNode> nodes,
                                                       const config::Settings& settings);

[[nodiscard]] std::string devices_text(const DeviceList& list, const Session& session);
[[nodiscard]] std::string devices_json(const DeviceList& list);

[[nodiscard]] Result<Output> run_devices(const Session& session);

} // namespace sagitta::report
