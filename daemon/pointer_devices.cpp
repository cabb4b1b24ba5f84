#include "daemon/pointer_devices.hpp"

namespace sagitta::daemon {

namespace {

class KernelPointer final : public OpenPointer {
public:
    explicit KernelPointer(input::EvdevPointer pointer) : m_pointer{std::move(pointer)} {}

    [[nodiscard]] int file_descriptor() const override { return m_pointer.file_descriptor(); }
    [[nodiscard]] estimator::Result<void> read(estimator::ReportBatch& batch) override {
        return m_pointer.read(batch);
    }

private:
    input::EvdevPointer m_pointer;
};

} // namespace

estimator::Result<std::vector<input::PointerNode>> KernelPointerDevices::list() {
    return input::list_pointers();
}

estimator::Result<std::unique_ptr<OpenPointer>>
KernelPointerDevices::open(const input::PointerNode& node, estimator::PointerIndex index) {
    return input::EvdevPointer::open(node, index)
        .map([](input::EvdevPointer&& pointer) -> std::unique_ptr<OpenPointer> {
            return std::make_unique<KernelPointer>(std::move(pointer));
        });
}

} // namespace sagitta::daemon
