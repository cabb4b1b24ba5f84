// A virtual machine with Debian's kernel: a shell inside it over a virtual serial port, and its
// monitors (HMP and QMP) over Unix sockets. Failures throw std::runtime_error: the test is over
// then. One thread.
#pragma once

#include <chrono>
#include <filesystem>
#include <memory>
#include <string>
#include <string_view>
#include <sys/types.h>
#include <vector>

namespace sagitta::guest {

using Millis = std::chrono::milliseconds;

/// One end of a Unix socket, with what has been received and not yet taken.
class Channel {
public:
    /// Connects, trying again until `patience` is over: the machine makes its sockets as it starts.
    Channel(const std::filesystem::path& socket, Millis patience);
    Channel(const Channel&) = delete;
    Channel& operator=(const Channel&) = delete;
    ~Channel();

    void send(std::string_view text);
    /// Everything up to and including `mark`, which is taken.
    std::string receive_until(std::string_view mark, Millis patience);
    /// Exactly `count` bytes.
    std::string receive_bytes(std::size_t count, Millis patience);

private:
    /// Waits for more. @return false when the time is over
    bool receive_more(std::chrono::steady_clock::time_point deadline);

    int m_fd = -1;
    std::string m_received;
};

struct MachineFiles {
    std::filesystem::path kernel;
    std::filesystem::path initramfs;
    std::filesystem::path folder; ///< for the sockets and the console's log
};

/// What a command inside printed, and its exit status.
struct Outcome {
    std::string output;
    int status;
};

class Machine {
public:
    /// Starts it and waits for its shell. @param utc  the guest's clock at start, ISO 8601
    Machine(const MachineFiles& files, const std::string& utc);
    Machine(const Machine&) = delete;
    Machine& operator=(const Machine&) = delete;
    /// Ends the process if it still runs.
    ~Machine();

    /// Runs a command in the guest's shell.
    Outcome run(const std::string& command, Millis patience = std::chrono::seconds{60});
    /// The same, but throws when the command fails.
    std::string must_run(const std::string& command, Millis patience = std::chrono::seconds{60});
    /// Brings a file of the guest here.
    std::string fetch(const std::string& path);
    /// Waits until a command succeeds inside.
    void wait_for(const std::string& command, Millis patience = std::chrono::seconds{30});

    /// A command of the human monitor. @return what it answered
    std::string monitor(const std::string& command);
    /// A command of the machine monitor, e.g. execute "device_del", arguments {"id":"m2"}.
    void qmp(const std::string& execute, const std::string& arguments);

    /// Stops the guest and waits for the process to end.
    void power_off();

private:
    void start(const std::vector<std::string>& command, const std::filesystem::path& log);

    pid_t m_process = -1;
    std::filesystem::path m_folder;
    std::unique_ptr<Channel> m_shell, m_monitor, m_qmp;
};

} // namespace sagitta::guest
