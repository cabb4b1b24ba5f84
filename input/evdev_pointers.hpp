// Finding the pointers of this machine, and reading one without blocking.
#pragma once

#include "estimator/pointer.hpp"
#include "estimator/report.hpp"
#include "estimator/result.hpp"
#include "input/packet.hpp"

#include <filesystem>
#include <memory>
#include <string>
#include <vector>

namespace sagitta::input {

/// A device node that is a pointer, whether or not it can be opened.
struct PointerNode {
    std::filesystem::path node; ///< /dev/input/eventN
    estimator::PointerDescription description;
    bool readable; ///< by this process
};

/// Lists pointers: by udev's ID_INPUT_* marks where udev runs, else by capability through sysfs
/// (/sys/class/input/eventN/device/capabilities), so that keyboards are never opened to find out
/// what they are. Ordered by the number of the node. Nodes that are keyboards too (a receiver's
/// second interface) are left out.
/// @return an empty list when there is none; io
[[nodiscard]] estimator::Result<std::vector<PointerNode>> list_pointers();

/// Lists the nodes that are a pointer and a keyboard at once. They are never opened; whoever tells
/// why a pointer is missing names them.
[[nodiscard]] estimator::Result<std::vector<PointerNode>> list_keyboard_pointers();

/// One open pointer: CLOCK_MONOTONIC, event mask set, so that no code but motion, wheels, contact
/// and pointer buttons reaches this process.
class EvdevPointer {
public:
    /// @return not_found; no_permission, also for a keyboard; io
    [[nodiscard]] static estimator::Result<EvdevPointer> open(const PointerNode& node,
                                                              estimator::PointerIndex index);
    EvdevPointer(EvdevPointer&&) noexcept;
    EvdevPointer& operator=(EvdevPointer&&) noexcept;
    ~EvdevPointer();

    /// As listed, with the resolution of the axes if the device tells it.
    [[nodiscard]] const estimator::PointerDescription& description() const;
    /// For the event loop; stays owned by this object.
    [[nodiscard]] int file_descriptor() const;
    /// Appends what the kernel holds now. Never blocks.
    /// @return not_found when the device has gone (unplugged)
    [[nodiscard]] estimator::Result<void> read(estimator::ReportBatch& batch);

private:
    struct State;
    explicit EvdevPointer(std::unique_ptr<State> state);
    std::unique_ptr<State> m_state;
};

} // namespace sagitta::input
