// The kernel's pointers as the daemon sees them. A test puts pipes in place.
#pragma once

#include "input/evdev_pointers.hpp"

#include <memory>

namespace sagitta::daemon {

/// One open pointer.
class OpenPointer {
public:
    OpenPointer() = default;
    OpenPointer(const OpenPointer&) = delete;
    OpenPointer& operator=(const OpenPointer&) = delete;
    virtual ~OpenPointer() = default;

    /// Readable when reports wait; owned by this object.
    [[nodiscard]] virtual int file_descriptor() const = 0;
    /// Appends what waits; never blocks. @return not_found when the pointer has gone
    [[nodiscard]] virtual estimator::Result<void> read(estimator::ReportBatch& batch) = 0;
};

class PointerDevices {
public:
    PointerDevices() = default;
    PointerDevices(const PointerDevices&) = delete;
    PointerDevices& operator=(const PointerDevices&) = delete;
    virtual ~PointerDevices() = default;

    [[nodiscard]] virtual estimator::Result<std::vector<input::PointerNode>> list() = 0;
    [[nodiscard]] virtual estimator::Result<std::unique_ptr<OpenPointer>>
    open(const input::PointerNode& node, estimator::PointerIndex index) = 0;
};

/// The pointers of this machine, through input/evdev_pointers.hpp.
class KernelPointerDevices final : public PointerDevices {
public:
    [[nodiscard]] estimator::Result<std::vector<input::PointerNode>> list() override;
    [[nodiscard]] estimator::Result<std::unique_ptr<OpenPointer>>
    open(const input::PointerNode& node, estimator::PointerIndex index) override;
};

} // namespace sagitta::daemon
