#include "input/device_facts.hpp"
#include "input/evdev_pointers.hpp"
#include "input/event_mask.hpp"
#include "input/event_queue.hpp"
#include "input/file.hpp"

#include <cerrno>
#include <ctime>
#include <fcntl.h>
#include <libevdev/libevdev.h>
#include <sys/ioctl.h>

namespace sagitta::input {

using estimator::ErrorCode;
using estimator::fail;
using estimator::PointerDescription;
using estimator::PointerKind;
using estimator::Result;

namespace {

struct FreeEvdev {
    void operator()(libevdev* device) const { libevdev_free(device); }
};
using Evdev = std::unique_ptr<libevdev, FreeEvdev>;

std::string named(const PointerNode& node) {
    return "'" + node.description.name + "' (" + shown(node.node) + ")";
}

template <std::size_t Codes>
bool set_mask(int fd, std::uint32_t type, const CodeBits<Codes>& codes) {
    input_mask mask{};
    mask.type = type;
    mask.codes_size = static_cast<std::uint32_t>(codes.bytes());
    mask.codes_ptr = reinterpret_cast<std::uintptr_t>(codes.data());
    return ::ioctl(fd, EVIOCSMASK, &mask) == 0;
}

/// Keeps every code that is not the pointer's business in the kernel.
bool set_masks(int fd, PointerKind kind) {
    const EventMask mask = event_mask(kind);
    return set_mask(fd, EV_SYN, mask.types) && set_mask(fd, EV_KEY, mask.keys) &&
           set_mask(fd, EV_REL, mask.relative) && set_mask(fd, EV_ABS, mask.absolute);
}

bool is_keyboard(const libevdev* device) {
    DeviceFacts facts;
    for (unsigned key = 0; key < KEY_CNT; ++key)
        facts.can.keys[key] = libevdev_has_event_code(device, EV_KEY, key) == 1;
    return is_keyboard(facts);
}

std::optional<estimator::AxisResolution> resolution_of(const libevdev* device) {
    const int x = libevdev_get_abs_resolution(device, ABS_X);
    const int y = libevdev_get_abs_resolution(device, ABS_Y);
    if (x <= 0 || y <= 0)
        return std::nullopt;
    return estimator::AxisResolution{static_cast<double>(x), static_cast<double>(y)};
}

/// What touches the device now, as the kernel knows it.
std::vector<std::uint16_t> contacts_now(int fd) {
    CodeBits<KEY_CNT> keys;
    std::vector<std::uint16_t> down;
    if (::ioctl(fd, EVIOCGKEY(keys.bytes()), keys.data()) < 0)
        return down;
    for (const std::uint16_t code : k_contact_codes)
        if (keys.has(code))
            down.push_back(code);
    return down;
}

bool sends_places(PointerKind kind) {
    return kind == PointerKind::touchpad || kind == PointerKind::absolute;
}

} // namespace

struct EvdevPointer::State {
    State(Descriptor opened, const PointerNode& node, estimator::PointerIndex index)
        : file{std::move(opened)}, name{named(node)},
          description{node.description}, assembler{index, node.description.kind} {}

    void learn_contacts() {
        drops_seen = assembler.drops();
        if (sends_places(description.kind))
            assembler.set_contacts(contacts_now(file.get()));
    }

    Descriptor file;
    std::string name; ///< for messages
    PointerDescription description;
    PacketAssembler assembler;
    EventQueue queue;
    std::uint64_t drops_seen = 0;
};

Result<EvdevPointer> EvdevPointer::open(const PointerNode& node, estimator::PointerIndex index) {
    Descriptor file{::open(node.node.c_str(), O_RDONLY | O_NONBLOCK | O_CLOEXEC | O_NOCTTY)};
    const int error = errno;
    if (file.get() < 0)
        return fail(code_of_errno(error), "cannot open the pointer " + named(node) + ": " +
                                              text_of_errno(error) +
                                              "; `sagitta check` tells how to mend it");
    if (!set_masks(file.get(), node.description.kind))
        return fail(ErrorCode::io, "the kernel takes no event mask for " + named(node) + ": " +
                                       text_of_errno(errno) +
                                       "; it is left closed, since keys could not be kept out");
    libevdev* raw_device = nullptr;
    const int created = libevdev_new_from_fd(file.get(), &raw_device);
    const Evdev device{raw_device};
    if (created < 0)
        return fail(code_of_errno(-created), "cannot ask the pointer " + named(node) +
                                                 " what it can do: " + text_of_errno(-created) +
                                                 "; plug it in again");
    if (is_keyboard(device.get()))
        return fail(ErrorCode::no_permission,
                    named(node) + " is a keyboard too and is never opened");
    // Last, since a change of the clock empties the queue.
    if (const int set = libevdev_set_clock_id(device.get(), CLOCK_MONOTONIC); set < 0)
        return fail(code_of_errno(-set), "cannot set the clock of the pointer " + named(node) +
                                             ": " + text_of_errno(-set) + "; plug it in again");
    auto state = std::make_unique<State>(std::move(file), node, index);
    if (sends_places(node.description.kind))
        state->description.resolution = resolution_of(device.get());
    state->learn_contacts();
    return EvdevPointer{std::move(state)};
}

EvdevPointer::EvdevPointer(std::unique_ptr<State> state) : m_state{std::move(state)} {}
EvdevPointer::EvdevPointer(EvdevPointer&&) noexcept = default;
EvdevPointer& EvdevPointer::operator=(EvdevPointer&&) noexcept = default;
EvdevPointer::~EvdevPointer() = default;

const PointerDescription& EvdevPointer::description() const {
    return m_state->description;
}

int EvdevPointer::file_descriptor() const {
    return m_state->file.get();
}

Result<void> EvdevPointer::read(estimator::ReportBatch& batch) {
    State& state = *m_state;
    auto done = state.queue.read(state.file.get(), state.assembler, batch);
    if (!done)
        return fail(done.error().code,
                    "cannot read the pointer " + state.name + ": " + done.error().message);
    if (state.assembler.drops() != state.drops_seen)
        state.learn_contacts();
    return {};
}

} // namespace sagitta::input
