#include "tests/guest/guest.hpp"

#include <stdexcept>
#include <thread>

namespace sagitta::guest {

using Clock = std::chrono::steady_clock;

namespace {

/// The lines of /proc/bus/input/devices that tell of one device, the handlers last.
std::string listing_of(const std::string& device) {
    return "sed -n '/^N: Name=\"" + device +
           "\"$/,/^H:/s/.*\\(event[0-9]*\\).*/\\1/p' /proc/bus/input/devices";
}

std::string first_line(const std::string& text) {
    return text.substr(0, text.find('\n'));
}

} // namespace

std::string Guest::node_of(const std::string& device) {
    m_machine.wait_for(listing_of(device) + " | grep event");
    const std::string node = "/dev/input/" + first_line(m_machine.must_run(listing_of(device)));
    m_machine.wait_for("test -e " + node);
    return node;
}

void Guest::wait_until_gone(const std::string& device) {
    m_machine.wait_for("! grep -q 'Name=\"" + device + "\"' /proc/bus/input/devices");
}

std::string Guest::start(const std::string& command, const std::string& output) {
    return first_line(m_machine.must_run(command + " </dev/null >" + output + " 2>&1 & echo $!"));
}

std::string Guest::start_witness(const std::string& arguments, const std::string& output) {
    std::string process = start("evdev_witness " + arguments, output);
    m_machine.wait_for("grep -q ready " + output);
    return process;
}

std::string Guest::start_daemon(const std::string& arguments, const std::string& log,
                                const std::string& node) {
    std::string process = start("sagittad " + arguments, log);
    try {
        m_machine.wait_for("ls -l /proc/" + process + "/fd | grep -q '" + node + "$'");
    } catch (const std::runtime_error& error) {
        throw std::runtime_error{std::string{error.what()} +
                                 "; sagittad said: " + m_machine.fetch(log)};
    }
    return process;
}

int Guest::stop(const std::string& process) {
    return m_machine.run("kill -TERM " + process + "; wait " + process).status;
}

bool Guest::holds_open(const std::string& process, const std::string& node) {
    return m_machine.run("ls -l /proc/" + process + "/fd | grep -q '" + node + "$'").status == 0;
}

void Guest::make_simulated_pointer() {
    m_machine.must_run("mkfifo /tmp/player.in");
    m_machine.must_run("uinput_player '" + k_simulated_pointer +
                       "' </tmp/player.in >/tmp/player.out 2>&1 &");
    m_machine.must_run("exec 9>/tmp/player.in");
    node_of(k_simulated_pointer);
}

void Guest::begin_simulated(const std::string& recording) {
    m_machine.must_run("echo /recordings/" + recording + " >&9");
    ++m_played;
}

std::string Guest::end_simulated() {
    const std::string count = std::to_string(m_played);
    m_machine.wait_for("test $(grep -c played /tmp/player.out) -ge " + count,
                       std::chrono::seconds{300});
    return first_line(m_machine.must_run("grep played /tmp/player.out | tail -n 1"));
}

void Guest::move_usb_mouse(const std::vector<Packet>& packets) {
    const auto begin = Clock::now();
    bool down = false;
    for (const Packet& packet : packets) {
        std::this_thread::sleep_until(
            begin + std::chrono::microseconds{packet.time_us - packets.front().time_us});
        if (packet.dx != 0 || packet.dy != 0) {
            m_machine.monitor("mouse_move " + std::to_string(packet.dx) + " " +
                              std::to_string(packet.dy));
        }
        if (packet.left_down != down) {
            down = packet.left_down;
            m_machine.monitor(down ? "mouse_button 1" : "mouse_button 0");
        }
    }
    std::this_thread::sleep_for(std::chrono::milliseconds{500});
}

std::string Guest::exported(const std::string& store, const std::string& arguments) {
    m_machine.must_run("sagitta export --store " + store + " --format csv " + arguments +
                       " >/tmp/export.csv");
    return m_machine.fetch("/tmp/export.csv");
}

} // namespace sagitta::guest
