// Runs inside the guest and keeps what happens at input nodes, independently of the programs under
// test.
//   evdev_witness events NODE FILE      every event of a node, as a raw stream with kernel stamps
//   evdev_witness opens FILE NODE...    a line with the node's name each time anyone opens it
// It says "ready" once it watches, and runs until it is killed.
#include <array>
#include <cerrno>
#include <cstdio>
#include <cstring>
#include <ctime>
#include <fcntl.h>
#include <linux/input.h>
#include <map>
#include <string>
#include <sys/inotify.h>
#include <sys/ioctl.h>
#include <unistd.h>

namespace {

int fail(const std::string& what) {
    std::fprintf(stderr, "evdev_witness: %s: %s\n", what.c_str(), std::strerror(errno));
    return 1;
}

int create(const char* file) {
    return open(file, O_WRONLY | O_CREAT | O_TRUNC | O_APPEND | O_CLOEXEC, 0600);
}

void announce() {
    std::puts("ready");
    std::fflush(stdout);
}

int keep_events(const char* node, const char* file) {
    const int input = open(node, O_RDONLY | O_CLOEXEC);
    const int output = create(file);
    int clock = CLOCK_MONOTONIC;
    if (input < 0 || output < 0 || ioctl(input, EVIOCSCLOCKID, &clock) != 0) {
        return fail(node);
    }
    announce();
    std::array<input_event, 256> events{};
    while (true) {
        const ssize_t size = read(input, events.data(), sizeof events);
        if (size < 0 && errno == ENODEV) {
            return 0; // unplugged
        }
        if (size <= 0 || write(output, events.data(), static_cast<std::size_t>(size)) != size) {
            return fail(node);
        }
    }
}

int keep_opens(const char* file, char** nodes) {
    const int output = create(file);
    const int watcher = inotify_init1(IN_CLOEXEC);
    if (output < 0 || watcher < 0) {
        return fail(file);
    }
    std::map<int, std::string> names;
    for (; *nodes != nullptr; ++nodes) {
        const int watch = inotify_add_watch(watcher, *nodes, IN_OPEN);
        if (watch < 0) {
            return fail(*nodes);
        }
        names[watch] = std::string{*nodes} + "\n";
    }
    announce();
    alignas(inotify_event) std::array<char, 4096> buffer{};
    while (true) {
        const ssize_t size = read(watcher, buffer.data(), buffer.size());
        if (size <= 0) {
            return fail("inotify");
        }
        for (std::size_t at = 0; at < static_cast<std::size_t>(size);) {
            inotify_event event{};
            std::memcpy(&event, buffer.data() + at, sizeof event);
            at += sizeof event + event.len;
            const auto name = names.find(event.wd);
            if ((event.mask & IN_OPEN) != 0 && name != names.end() &&
                write(output, name->second.data(), name->second.size()) < 0) {
                return fail(file);
            }
        }
    }
}

} // namespace

int main(int argc, char** argv) {
    const std::string what = argc > 1 ? argv[1] : "";
    if (what == "events" && argc == 4) {
        return keep_events(argv[2], argv[3]);
    }
    if (what == "opens" && argc >= 4) {
        return keep_opens(argv[2], argv + 3);
    }
    std::fputs("usage: evdev_witness events NODE FILE | opens FILE NODE...\n", stderr);
    return 2;
}
