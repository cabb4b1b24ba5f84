// The program itself, as a process: start, signals, exit codes. READY=1 is awaited on a socket of
// our own, as systemd does, so nothing here sleeps.
#include "support.hpp"

#include <array>
#include <cerrno>
#include <csignal>
#include <cstring>
#include <doctest/doctest.h>
#include <fcntl.h>
#include <fstream>
#include <poll.h>
#include <sstream>
#include <sys/socket.h>
#include <sys/un.h>
#include <sys/wait.h>
#include <unistd.h>
#include <vector>

using namespace sagitta;

namespace {

/// The other end of NOTIFY_SOCKET.
class Manager {
public:
    explicit Manager(const std::filesystem::path& path)
        : m_fd{socket(AF_UNIX, SOCK_DGRAM | SOCK_CLOEXEC, 0)} {
        sockaddr_un address{};
        address.sun_family = AF_UNIX;
        std::strncpy(address.sun_path, path.c_str(), sizeof address.sun_path - 1);
        REQUIRE(bind(m_fd, reinterpret_cast<const sockaddr*>(&address), sizeof address) == 0);
    }
    Manager(const Manager&) = delete;
    Manager& operator=(const Manager&) = delete;
    ~Manager() { ::close(m_fd); }

    /// Reads messages until one holds `wanted`; false when none comes for 20 s.
    [[nodiscard]] bool hears(const std::string& wanted) const {
        pollfd waiting{m_fd, POLLIN, 0};
        while (poll(&waiting, 1, 20'000) == 1) {
            std::array<char, 1024> message{};
            const ssize_t length = recv(m_fd, message.data(), message.size(), 0);
            if (length > 0 &&
                std::string_view{message.data(), static_cast<std::size_t>(length)}.find(wanted) !=
                    std::string_view::npos) {
                return true;
            }
        }
        return false;
    }

private:
    int m_fd;
};

class Process {
public:
    Process(const std::filesystem::path& dir, const std::vector<std::string>& options) {
        std::vector<std::string> words{SAGITTAD};
        words.insert(words.end(), options.begin(), options.end());
        std::vector<char*> arguments;
        for (std::string& word : words) {
            arguments.push_back(word.data());
        }
        arguments.push_back(nullptr);
        const std::string log = dir / "log";
        std::vector<std::string> variables{
            "XDG_RUNTIME_DIR=" + dir.string(), "XDG_CONFIG_HOME=" + dir.string(),
            "NOTIFY_SOCKET=" + (dir / "notify").string(), "WATCHDOG_USEC=3600000000"};
        std::vector<char*> environment;
        for (std::string& variable : variables) {
            environment.push_back(variable.data());
        }
        environment.push_back(nullptr);
        m_pid = fork();
        if (m_pid == 0) {
            const int out = ::open(log.c_str(), O_WRONLY | O_CREAT | O_APPEND, 0600);
            dup2(out, STDOUT_FILENO);
            dup2(out, STDERR_FILENO);
            execve(arguments[0], arguments.data(), environment.data());
            _exit(127);
        }
    }
    Process(const Process&) = delete;
    Process& operator=(const Process&) = delete;
    ~Process() {
        if (m_pid > 0) {
            kill(m_pid, SIGKILL);
            waitpid(m_pid, nullptr, 0);
        }
    }
    void send(int signal) const { kill(m_pid, signal); }
    int exit_code() {
        int status = 0;
        waitpid(m_pid, &status, 0);
        m_pid = -1;
        return WIFEXITED(status) ? WEXITSTATUS(status) : -1;
    }

private:
    pid_t m_pid = -1;
};

std::string log_of(const test::TempDir& dir) {
    std::ifstream file{dir.path() / "log"};
    std::stringstream text;
    text << file.rdbuf();
    return text.str();
}

} // namespace

TEST_CASE("sagittad says that it is ready and alive, and stops cleanly on SIGTERM") {
    const test::TempDir dir;
    const Manager manager{dir.path() / "notify"};
    Process sagittad{dir.path(), {"--store", dir.path() / "s.db"}};
    REQUIRE(manager.hears("WATCHDOG=1"));
    REQUIRE(manager.hears("READY=1"));
    CHECK(std::filesystem::exists(dir.path() / "sagitta/control"));
    sagittad.send(SIGTERM);
    CHECK(manager.hears("STOPPING=1"));
    CHECK(sagittad.exit_code() == 0);
    CHECK_FALSE(std::filesystem::exists(dir.path() / "sagitta/control"));
    CHECK(std::filesystem::exists(dir.path() / "s.db"));
}

TEST_CASE("a wrong config is refused on SIGHUP, and sagittad goes on") {
    const test::TempDir dir;
    const auto config = dir.path() / "my.yaml";
    std::ofstream{config} << "log:\n  level: info\n";
    const Manager manager{dir.path() / "notify"};
    Process sagittad{dir.path(), {"--store", dir.path() / "s.db", "--config", config}};
    REQUIRE(manager.hears("READY=1"));
    std::ofstream{config} << "no_such_key: 1\n";
    sagittad.send(SIGHUP);
    REQUIRE(manager.hears("RELOADING=1"));
    REQUIRE(manager.hears("READY=1"));
    sagittad.send(SIGINT);
    CHECK(sagittad.exit_code() == 0);
    const std::string log = log_of(dir);
    CHECK(log.find("no_such_key") != std::string::npos);
    CHECK(log.find("the old settings stay") != std::string::npos);
}

TEST_CASE("sagittad ends with 2 on wrong usage and 1 when it cannot record") {
    const test::TempDir dir;
    Process wrong{dir.path(), {"--no-such-option"}};
    CHECK(wrong.exit_code() == 2);
    Process no_config{dir.path(), {"--config", dir.path() / "none.yaml"}};
    CHECK(no_config.exit_code() == 1);
    CHECK(log_of(dir).find("none.yaml") != std::string::npos);
    Process no_store{dir.path(), {"--store", dir.path()}};
    CHECK(no_store.exit_code() == 1);
    Process help{dir.path(), {"--help"}};
    CHECK(help.exit_code() == 0);
    CHECK(log_of(dir).find("Examples:") != std::string::npos);
}
