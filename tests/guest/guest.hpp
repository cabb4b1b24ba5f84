// What the scenes of the guest test do inside the machine: find nodes, start programs, move
// pointers, look at open files.
#pragma once

#include "tests/guest/machine.hpp"
#include "tests/guest/packets.hpp"

#include <string>
#include <vector>

namespace sagitta::guest {

/// The names that the kernel gives the devices of this machine.
inline const std::string k_simulated_pointer = "Simulated pointer";
inline const std::string k_usb_mouse = "QEMU QEMU USB Mouse";
inline const std::string k_usb_keyboard = "QEMU QEMU USB Keyboard";
inline const std::string k_ps2_keyboard = "AT Translated Set 2 keyboard";

class Guest {
public:
    explicit Guest(const MachineFiles& files, const std::string& utc) : m_machine{files, utc} {}

    [[nodiscard]] Machine& machine() { return m_machine; }

    /// The node of a device, e.g. /dev/input/event2; waits for it.
    std::string node_of(const std::string& device);
    /// Waits until a device has gone.
    void wait_until_gone(const std::string& device);

    /// Starts a program in the background, its output in a file. @return its process number
    std::string start(const std::string& command, const std::string& output);
    /// Starts a witness and waits until it watches.
    std::string start_witness(const std::string& arguments, const std::string& output);
    /// Starts sagittad and waits until it has opened a node.
    std::string start_daemon(const std::string& arguments, const std::string& log,
                             const std::string& node);
    /// Asks a process to stop. @return its exit status
    int stop(const std::string& process);

    /// True when a process holds a node open now.
    bool holds_open(const std::string& process, const std::string& node);

    /// Makes the virtual pointer. It lives to the machine's end.
    void make_simulated_pointer();
    /// Lets the virtual pointer begin a recording of the initramfs.
    void begin_simulated(const std::string& recording);
    /// Waits until it has been played. @return what the player said
    std::string end_simulated();

    /// Moves and clicks the USB mouse from the monitor, at the times of the packets.
    void move_usb_mouse(const std::vector<Packet>& packets);
    /// Types a letter from the monitor.
    void type(const std::string& key) { m_machine.monitor("sendkey " + key); }

    /// `sagitta export` inside, as text.
    std::string exported(const std::string& store, const std::string& arguments);

private:
    Machine m_machine;
    int m_played = 0;
};

} // namespace sagitta::guest
