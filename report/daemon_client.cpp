#include "report/daemon_client.hpp"

#include "report/numbers.hpp"
#include "report/table.hpp"

#include <cerrno>
#include <cstdlib>
#include <cstring>
#include <fmt/format.h>
#include <nlohmann/json.hpp>
#include <sys/socket.h>
#include <sys/time.h>
#include <sys/un.h>
#include <unistd.h>

namespace sagitta::report {
namespace {

using estimator::ErrorCode;
using estimator::fail;
using Json = nlohmann::json;

constexpr std::size_t k_longest_answer = std::size_t{1} << 20;
constexpr const char* k_start_hint = "start it with 'systemctl --user start sagittad'";

/// A connected socket, closed at the end.
class Connection {
public:
    explicit Connection(int fd) : m_fd{fd} {}
    ~Connection() { ::close(m_fd); }
    Connection(const Connection&) = delete;
    Connection& operator=(const Connection&) = delete;

    Result<std::string> exchange(const std::string& line) const {
        for (std::size_t sent = 0; sent < line.size();) {
            const ssize_t n = ::send(m_fd, line.data() + sent, line.size() - sent, MSG_NOSIGNAL);
            if (n < 0) {
                return broken(errno);
            }
            sent += static_cast<std::size_t>(n);
        }
        std::string answer;
        char buffer[4096];
        while (answer.find('\n') == std::string::npos && answer.size() < k_longest_answer) {
            const ssize_t n = ::recv(m_fd, buffer, sizeof buffer, 0);
            if (n < 0) {
                return broken(errno);
            }
            if (n == 0) {
                break;
            }
            answer.append(buffer, static_cast<std::size_t>(n));
        }
        return answer.substr(0, answer.find('\n'));
    }

private:
    static Result<std::string> broken(int error) {
        return fail(ErrorCode::io, fmt::format("sagittad did not answer on {}: {}; see "
                                               "'systemctl --user status sagittad'",
                                               control_socket().string(), std::strerror(error)));
    }
    int m_fd;
};

std::string status_text(const Json& status, const Session& session) {
    const std::string state = status.value("state", "unknown");
    std::string text = wrapped(fmt::format("sagittad {} is {}.", status.value("version", ""),
                                           state == "recording"    ? "recording"
                                           : state == "no_pointer" ? "waiting for a pointer"
                                           : state == "paused"     ? "paused"
                                           : state == "session_inactive"
                                               ? "waiting for the session to become active"
                                               : state));
    const std::string condition = status.value("condition", "");
    text += wrapped(fmt::format("  store: {}", printable(status.value("store", ""))));
    text += wrapped("  condition: " + (condition.empty() ? "unlabelled" : printable(condition)));
    text += wrapped("  button presses since its start: " +
                    grouped(status.value("presses", std::uint64_t{0})));
    Table table{{{"pointer", Align::left},
                 {"kind", Align::left},
                 {"CPI", Align::right},
                 {"", Align::left}}};
    for (const Json& pointer : status.value("pointers", Json::array())) {
        table.add({shortened(printable(pointer.value("name", "")), 40), pointer.value("kind", ""),
                   fmt::format("{:.0f}", pointer.value("cpi", 0.0)),
                   pointer.value("open", false) ? "being read" : "not plugged in"});
    }
    if (!table.empty()) {
        text += "\n" + table.text();
    }
    for (const Json& why : status.value("refused", Json::array())) {
        text += session.style.warning(wrapped(printable(why.get<std::string>())));
    }
    if (status.contains("write_failure") && status["write_failure"].is_string()) {
        text += session.style.warning(wrapped(fmt::format(
            "The last write failed: {}", printable(status["write_failure"].get<std::string>()))));
    }
    return text;
}

} // namespace

std::filesystem::path control_socket() {
    const char* runtime = std::getenv("XDG_RUNTIME_DIR");
    if (runtime == nullptr || *runtime == '\0') {
        return {};
    }
    return std::filesystem::path{runtime} / "sagitta" / "control";
}

Result<Json> ask_daemon(const std::string& request) {
    const std::filesystem::path path = control_socket();
    if (path.empty()) {
        return fail(ErrorCode::not_found,
                    "the daemon's socket cannot be found, since XDG_RUNTIME_DIR is not set; run "
                    "this from a login session");
    }
    sockaddr_un address{};
    address.sun_family = AF_UNIX;
    if (path.native().size() >= sizeof address.sun_path) {
        return fail(ErrorCode::bad_value, "the path " + path.string() +
                                              " is too long for a socket; shorten XDG_RUNTIME_DIR");
    }
    std::memcpy(address.sun_path, path.c_str(), path.native().size() + 1);
    const int fd = ::socket(AF_UNIX, SOCK_STREAM | SOCK_CLOEXEC, 0);
    if (fd < 0) {
        const int error = errno;
        return fail(ErrorCode::io, fmt::format("no socket could be made: {}; close some programs "
                                               "and try again",
                                               std::strerror(error)));
    }
    const Connection connection{fd};
    const timeval patience{5, 0};
    ::setsockopt(fd, SOL_SOCKET, SO_RCVTIMEO, &patience, sizeof patience);
    ::setsockopt(fd, SOL_SOCKET, SO_SNDTIMEO, &patience, sizeof patience);
    if (::connect(fd, reinterpret_cast<const sockaddr*>(&address), sizeof address) != 0) {
        const int error = errno;
        if (error == ENOENT || error == ECONNREFUSED) {
            return fail(ErrorCode::not_found, fmt::format("sagittad is not running (nothing "
                                                          "listens on {}); {}",
                                                          path.string(), k_start_hint));
        }
        return fail(error == EACCES ? ErrorCode::no_permission : ErrorCode::io,
                    fmt::format("sagittad's socket {} could not be used: {}; run this as the "
                                "person whose daemon it is",
                                path.string(), std::strerror(error)));
    }
    const auto answer = connection.exchange(request + "\n");
    if (!answer) {
        return tl::unexpected{answer.error()};
    }
    Json json = Json::parse(*answer, nullptr, false);
    if (!json.is_object()) {
        return fail(ErrorCode::bad_format, "what listens on " + path.string() +
                                               " does not answer as sagittad does; restart it "
                                               "with 'systemctl --user restart sagittad'");
    }
    if (!json.value("ok", false)) {
        return fail(
            ErrorCode::bad_value,
            fmt::format("sagittad refused: {}", printable(json.value("error", "no reason given"))));
    }
    return json;
}

Result<Output> run_daemon_order(DaemonOrder order, const std::string& label,
                                const Session& session) {
    if (label != printable(label)) {
        return fail(ErrorCode::bad_value, "a condition is UTF-8 text without control characters; "
                                          "retype it");
    }
    try {
        switch (order) {
        case DaemonOrder::status:
            return ask_daemon("status").map([&](const Json& status) {
                return Output{session.json ? status.dump(2) + "\n" : status_text(status, session)};
            });
        case DaemonOrder::pause:
            return ask_daemon("pause").map([&](const Json& done) {
                return Output{session.json ? done.dump(2) + "\n"
                                           : "Recording is paused until 'sagitta resume'.\n"};
            });
        case DaemonOrder::resume:
            return ask_daemon("resume").map([&](const Json& done) {
                return Output{session.json ? done.dump(2) + "\n" : "Recording goes on.\n"};
            });
        case DaemonOrder::label:
            return ask_daemon("label " + label).map([&](const Json& done) {
                return Output{session.json    ? done.dump(2) + "\n"
                              : label.empty() ? "From now on movements are unlabelled.\n"
                                              : "From now on movements count under the condition " +
                                                    printable(label) + ".\n"};
            });
        }
    } catch (const Json::exception&) {
        return fail(ErrorCode::bad_format, "sagittad answered with fields of a kind that this "
                                           "program does not know; install the same version of "
                                           "both");
    }
    return Output{};
}

} // namespace sagitta::report
