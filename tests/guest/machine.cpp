#include "tests/guest/machine.hpp"

#include <array>
#include <cerrno>
#include <cstring>
#include <fcntl.h>
#include <poll.h>
#include <signal.h>
#include <stdexcept>
#include <sys/prctl.h>
#include <sys/resource.h>
#include <sys/socket.h>
#include <sys/un.h>
#include <sys/wait.h>
#include <thread>
#include <unistd.h>

namespace sagitta::guest {

using Clock = std::chrono::steady_clock;

namespace {

constexpr Millis k_boot_patience = std::chrono::seconds{180};
constexpr std::string_view k_status_mark = "@@status ";
constexpr std::string_view k_monitor_prompt = "(qemu) ";

int connect_to(const std::filesystem::path& path, Clock::time_point deadline) {
    sockaddr_un address{};
    address.sun_family = AF_UNIX;
    const std::string name = path.string();
    if (name.size() >= sizeof(address.sun_path)) {
        throw std::runtime_error{"the socket's name is too long: " + name};
    }
    std::memcpy(address.sun_path, name.c_str(), name.size() + 1);
    while (true) {
        const int fd = socket(AF_UNIX, SOCK_STREAM | SOCK_CLOEXEC, 0);
        if (connect(fd, reinterpret_cast<const sockaddr*>(&address), sizeof address) == 0) {
            return fd;
        }
        const int error = errno;
        close(fd);
        if (Clock::now() > deadline) {
            throw std::runtime_error{"cannot connect to " + name + ": " + std::strerror(error)};
        }
        std::this_thread::sleep_for(Millis{50});
    }
}

std::vector<std::string> machine_command(const MachineFiles& files, const std::string& utc) {
    const auto in_folder = [&](const char* name) { return (files.folder / name).string(); };
    const auto socket = [&](const char* name) {
        return "unix:" + in_folder(name) + ",server=on,wait=off";
    };
    return {"qemu-system-x86_64",
            "-accel",
            "tcg",
            "-m",
            "256",
            "-nodefaults",
            "-no-user-config",
            "-display",
            "none",
            "-no-reboot",
            "-rtc",
            "base=" + utc + ",clock=vm",
            "-kernel",
            files.kernel.string(),
            "-initrd",
            files.initramfs.string(),
            "-append",
            "console=ttyS0 quiet panic=-1",
            "-serial",
            "file:" + in_folder("console.log"),
            "-chardev",
            "socket,id=shell,path=" + in_folder("shell") + ",server=on,wait=off",
            "-device",
            "virtio-serial-pci",
            "-device",
            "virtserialport,chardev=shell",
            "-monitor",
            socket("monitor"),
            "-qmp",
            socket("qmp"),
            "-device",
            "qemu-xhci,id=usb",
            "-device",
            "usb-kbd,id=keyboard,bus=usb.0",
            "-device",
            "usb-mouse,id=mouse,bus=usb.0"};
}

} // namespace

Channel::Channel(const std::filesystem::path& socket, Millis patience)
    : m_fd{connect_to(socket, Clock::now() + patience)} {}

Channel::~Channel() {
    close(m_fd);
}

void Channel::send(std::string_view text) {
    while (!text.empty()) {
        const ssize_t sent = ::send(m_fd, text.data(), text.size(), MSG_NOSIGNAL);
        if (sent < 0 && errno != EINTR) {
            throw std::runtime_error{std::string{"the machine does not listen: "} +
                                     std::strerror(errno)};
        }
        text.remove_prefix(sent < 0 ? 0 : static_cast<std::size_t>(sent));
    }
}

bool Channel::receive_more(Clock::time_point deadline) {
    const auto left = std::chrono::duration_cast<Millis>(deadline - Clock::now());
    pollfd waiting{m_fd, POLLIN, 0};
    if (left.count() <= 0 || poll(&waiting, 1, static_cast<int>(left.count())) <= 0) {
        return Clock::now() < deadline;
    }
    std::array<char, 65536> buffer{};
    const ssize_t count = read(m_fd, buffer.data(), buffer.size());
    if (count <= 0) {
        throw std::runtime_error{"the machine has gone; its console.log may say why"};
    }
    m_received.append(buffer.data(), static_cast<std::size_t>(count));
    return true;
}

std::string Channel::receive_until(std::string_view mark, Millis patience) {
    const auto deadline = Clock::now() + patience;
    std::size_t searched = 0;
    while (true) {
        const std::size_t at = m_received.find(mark, searched);
        if (at != std::string::npos) {
            std::string taken = m_received.substr(0, at + mark.size());
            m_received.erase(0, at + mark.size());
            return taken;
        }
        searched = m_received.size() < mark.size() ? 0 : m_received.size() - mark.size();
        if (!receive_more(deadline)) {
            throw std::runtime_error{"no \"" + std::string{mark} + "\" from the machine within " +
                                     std::to_string(patience.count()) +
                                     " ms; it said: " + m_received};
        }
    }
}

std::string Channel::receive_bytes(std::size_t count, Millis patience) {
    const auto deadline = Clock::now() + patience;
    while (m_received.size() < count) {
        if (!receive_more(deadline)) {
            throw std::runtime_error{"the machine sent " + std::to_string(m_received.size()) +
                                     " of " + std::to_string(count) + " bytes"};
        }
    }
    std::string taken = m_received.substr(0, count);
    m_received.erase(0, count);
    return taken;
}

Machine::Machine(const MachineFiles& files, const std::string& utc) : m_folder{files.folder} {
    for (const char* name : {"shell", "monitor", "qmp"}) {
        std::filesystem::remove(m_folder / name);
    }
    start(machine_command(files, utc), m_folder / "qemu.log");
    constexpr Millis patience{10000};
    m_shell = std::make_unique<Channel>(m_folder / "shell", patience);
    m_monitor = std::make_unique<Channel>(m_folder / "monitor", patience);
    m_qmp = std::make_unique<Channel>(m_folder / "qmp", patience);
    m_monitor->receive_until(k_monitor_prompt, patience);
    m_qmp->receive_until("\n", patience);
    qmp("qmp_capabilities", "{}");
    m_shell->receive_until("@@ready\n", k_boot_patience);
}

Machine::~Machine() {
    if (m_process > 0) {
        kill(m_process, SIGKILL);
        waitpid(m_process, nullptr, 0);
    }
}

void Machine::start(const std::vector<std::string>& command, const std::filesystem::path& log) {
    std::vector<std::string> words = command;
    std::vector<char*> arguments;
    for (std::string& word : words) {
        arguments.push_back(word.data());
    }
    arguments.push_back(nullptr);
    const int output = open(log.c_str(), O_WRONLY | O_CREAT | O_TRUNC | O_CLOEXEC, 0644);
    m_process = fork();
    if (m_process < 0) {
        throw std::runtime_error{std::string{"cannot start the machine: "} + std::strerror(errno)};
    }
    if (m_process == 0) {
        prctl(PR_SET_PDEATHSIG, SIGKILL);
        // Where it is allowed, ahead of other work, so that the guest's clock runs evenly.
        setpriority(PRIO_PROCESS, 0, -10);
        dup2(open("/dev/null", O_RDONLY), STDIN_FILENO);
        dup2(output, STDOUT_FILENO);
        dup2(output, STDERR_FILENO);
        execvp(arguments[0], arguments.data());
        _exit(127);
    }
    close(output);
}

Outcome Machine::run(const std::string& command, Millis patience) {
    m_shell->send(command + "\necho \"" + std::string{k_status_mark} + "$?\"\n");
    std::string output = m_shell->receive_until(k_status_mark, patience);
    output.resize(output.size() - k_status_mark.size());
    const std::string status = m_shell->receive_until("\n", patience);
    return {std::move(output), std::stoi(status)};
}

std::string Machine::must_run(const std::string& command, Millis patience) {
    Outcome outcome = run(command, patience);
    if (outcome.status != 0) {
        throw std::runtime_error{"inside the machine \"" + command + "\" ended with status " +
                                 std::to_string(outcome.status) + ": " + outcome.output};
    }
    return std::move(outcome.output);
}

std::string Machine::fetch(const std::string& path) {
    constexpr Millis patience = std::chrono::seconds{120};
    m_shell->send("wc -c < " + path + " && cat " + path + "\n");
    const auto size = std::stoul(m_shell->receive_until("\n", patience));
    return m_shell->receive_bytes(size, patience);
}

void Machine::wait_for(const std::string& command, Millis patience) {
    const auto deadline = Clock::now() + patience;
    while (run(command + " >/dev/null 2>&1").status != 0) {
        if (Clock::now() > deadline) {
            throw std::runtime_error{"inside the machine \"" + command + "\" did not come true"};
        }
        std::this_thread::sleep_for(Millis{100});
    }
}

std::string Machine::monitor(const std::string& command) {
    m_monitor->send(command + "\n");
    // The monitor echoes the line first, then answers, then prompts.
    m_monitor->receive_until("\n", std::chrono::seconds{10});
    return m_monitor->receive_until(k_monitor_prompt, std::chrono::seconds{10});
}

void Machine::qmp(const std::string& execute, const std::string& arguments) {
    m_qmp->send("{\"execute\":\"" + execute + "\",\"arguments\":" + arguments + "}\n");
    while (true) {
        const std::string line = m_qmp->receive_until("\n", std::chrono::seconds{10});
        if (line.find("\"error\"") != std::string::npos) {
            throw std::runtime_error{"the machine refused " + execute + ": " + line};
        }
        if (line.find("\"return\"") != std::string::npos) {
            return; // lines of other kinds are events
        }
    }
}

void Machine::power_off() {
    m_shell->send("sync; poweroff -f\n");
    const auto deadline = Clock::now() + std::chrono::seconds{20};
    while (waitpid(m_process, nullptr, WNOHANG) == 0) {
        if (Clock::now() > deadline) {
            throw std::runtime_error{"the machine did not power off"};
        }
        std::this_thread::sleep_for(Millis{50});
    }
    m_process = -1;
}

} // namespace sagitta::guest
