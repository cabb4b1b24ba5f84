// Runs inside the guest: a virtual pointer that plays raw recordings at the times of their stamps.
//   uinput_player NAME
// It prints the node of its device, then reads the names of recordings from standard input, one a
// line. It plays each and prints "played N packets, at most X us late". The device lives until
// the input ends.
#include <algorithm>
#include <array>
#include <cerrno>
#include <cstdint>
#include <cstdio>
#include <cstring>
#include <ctime>
#include <fstream>
#include <iostream>
#include <libevdev/libevdev-uinput.h>
#include <libevdev/libevdev.h>
#include <linux/input.h>
#include <memory>
#include <sched.h>
#include <string>
#include <vector>

namespace {

constexpr std::int64_t k_ns_per_us = 1000;
constexpr std::int64_t k_ns_per_s = 1'000'000'000;
/// A pointer never sends faster than its rate, so packets that are late catch up gradually.
constexpr std::int64_t k_min_gap_ns = 900'000;
constexpr std::int64_t k_lead_ns = 300'000'000; ///< still time before the first packet

std::int64_t now_ns() {
    timespec now{};
    clock_gettime(CLOCK_MONOTONIC, &now);
    return now.tv_sec * k_ns_per_s + now.tv_nsec;
}

void sleep_until(std::int64_t at_ns) {
    const timespec at{at_ns / k_ns_per_s, at_ns % k_ns_per_s};
    while (clock_nanosleep(CLOCK_MONOTONIC, TIMER_ABSTIME, &at, nullptr) == EINTR) {
    }
}

std::int64_t stamp_ns(const input_event& event) {
    return event.input_event_sec * k_ns_per_s + event.input_event_usec * k_ns_per_us;
}

std::vector<input_event> read_events(const std::string& file) {
    std::ifstream stream{file, std::ios::binary};
    std::vector<input_event> events;
    input_event event{};
    while (stream.read(reinterpret_cast<char*>(&event), sizeof event)) {
        events.push_back(event);
    }
    return events;
}

using Uinput = std::unique_ptr<libevdev_uinput, decltype(&libevdev_uinput_destroy)>;

Uinput create_pointer(const char* name) {
    const std::unique_ptr<libevdev, decltype(&libevdev_free)> device{libevdev_new(), libevdev_free};
    libevdev_set_name(device.get(), name);
    libevdev_set_id_bustype(device.get(), BUS_VIRTUAL);
    for (const unsigned code : std::array<unsigned, 4>{REL_X, REL_Y, REL_WHEEL, REL_WHEEL_HI_RES}) {
        libevdev_enable_event_code(device.get(), EV_REL, code, nullptr);
    }
    for (const unsigned code : std::array<unsigned, 3>{BTN_LEFT, BTN_RIGHT, BTN_MIDDLE}) {
        libevdev_enable_event_code(device.get(), EV_KEY, code, nullptr);
    }
    libevdev_uinput* created = nullptr;
    const int error =
        libevdev_uinput_create_from_device(device.get(), LIBEVDEV_UINPUT_OPEN_MANAGED, &created);
    if (error < 0) {
        std::fprintf(stderr, "uinput_player: cannot create a device: %s\n", std::strerror(-error));
    }
    return {created, libevdev_uinput_destroy};
}

/// @return false when the kernel refused an event
bool play(const libevdev_uinput* pointer, const std::vector<input_event>& events) {
    const std::int64_t shift_ns = now_ns() + k_lead_ns - stamp_ns(events.front());
    std::int64_t latest_ns = 0;
    std::int64_t sent_ns = 0;
    std::size_t packets = 0;
    bool at_packet_start = true;
    for (const input_event& event : events) {
        if (at_packet_start) {
            const std::int64_t due_ns = stamp_ns(event) + shift_ns;
            sleep_until(std::max(due_ns, sent_ns + k_min_gap_ns));
            sent_ns = now_ns();
            latest_ns = std::max(latest_ns, sent_ns - due_ns);
        }
        if (libevdev_uinput_write_event(pointer, event.type, event.code, event.value) < 0) {
            return false;
        }
        at_packet_start = event.type == EV_SYN;
        packets += at_packet_start ? 1 : 0;
    }
    std::printf("played %zu packets, at most %lld us late\n", packets,
                static_cast<long long>(latest_ns / k_ns_per_us));
    std::fflush(stdout);
    return true;
}

} // namespace

int main(int argc, char** argv) {
    if (argc != 2) {
        std::fputs("usage: uinput_player NAME <list of recordings\n", stderr);
        return 2;
    }
    const Uinput pointer = create_pointer(argv[1]);
    if (!pointer) {
        return 1;
    }
    // Ahead of everything else in the guest, so that what is late is the emulator's doing.
    const sched_param priority{.sched_priority = 50};
    sched_setscheduler(0, SCHED_FIFO, &priority);
    std::puts(libevdev_uinput_get_devnode(pointer.get()));
    std::fflush(stdout);
    std::string file;
    while (std::getline(std::cin, file)) {
        const std::vector<input_event> events = read_events(file);
        if (events.empty() || !play(pointer.get(), events)) {
            std::fprintf(stderr, "uinput_player: cannot play %s\n", file.c_str());
            return 1;
        }
    }
    return 0;
}
