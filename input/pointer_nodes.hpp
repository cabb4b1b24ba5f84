// The event nodes of a machine and what is known of them without opening any.
#pragma once

#include "input/device_facts.hpp"
#include "input/evdev_pointers.hpp"

#include <filesystem>
#include <vector>

namespace sagitta::input {

struct NodeFacts {
    std::filesystem::path node; ///< /dev/input/eventN
    DeviceFacts facts;
};

/// Reads name, ids and capabilities of an input device.
/// @param device_folder  e.g. /sys/class/input/event3/device
[[nodiscard]] DeviceFacts read_sysfs_facts(const std::filesystem::path& device_folder);

/// All event nodes by sysfs. @param root  "/", or the root of a copy
[[nodiscard]] estimator::Result<std::vector<NodeFacts>>
nodes_by_sysfs(const std::filesystem::path& root);

/// All event nodes by udev's database.
[[nodiscard]] estimator::Result<std::vector<NodeFacts>> nodes_by_udev();

struct SortedNodes {
    std::vector<PointerNode> pointers;
    std::vector<PointerNode> keyboard_pointers; ///< both at once
};
[[nodiscard]] SortedNodes sort_nodes(std::vector<NodeFacts> nodes);

} // namespace sagitta::input
