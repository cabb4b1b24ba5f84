#include "daemon/control_socket.hpp"

#include "daemon/control_protocol.hpp"

#include <algorithm>
#include <boost/asio/buffer.hpp>
#include <boost/asio/local/stream_protocol.hpp>
#include <boost/asio/read_until.hpp>
#include <boost/asio/steady_timer.hpp>
#include <boost/asio/write.hpp>
#include <cerrno>
#include <cstdlib>
#include <cstring>
#include <fcntl.h>
#include <fmt/format.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <sys/un.h>
#include <unistd.h>
#include <utility>
#include <vector>

namespace sagitta::daemon {

namespace asio = boost::asio;
using asio::local::stream_protocol;
using boost::system::error_code;
using estimator::ErrorCode;
using estimator::fail;

namespace {

class FileDescriptor {
public:
    explicit FileDescriptor(int fd) : m_fd{fd} {}
    FileDescriptor(FileDescriptor&& other) noexcept : m_fd{std::exchange(other.m_fd, -1)} {}
    FileDescriptor& operator=(FileDescriptor&&) = delete;
    ~FileDescriptor() {
        if (m_fd >= 0) {
            ::close(m_fd);
        }
    }
    [[nodiscard]] int get() const { return m_fd; }

private:
    int m_fd;
};

auto failed_on(const std::filesystem::path& path, const char* what, int reason) {
    return fail(reason == EACCES || reason == EPERM || reason == EROFS ? ErrorCode::no_permission
                                                                       : ErrorCode::io,
                fmt::format("cannot {} {}: {}; check $XDG_RUNTIME_DIR", what, path.string(),
                            std::strerror(reason)));
}

estimator::Result<void> make_private_dir(const std::filesystem::path& dir) {
    if (mkdir(dir.c_str(), 0700) != 0 && errno != EEXIST) {
        return failed_on(dir, "make the folder", errno);
    }
    struct stat found {};
    if (lstat(dir.c_str(), &found) != 0) {
        return failed_on(dir, "look at", errno);
    }
    if (!S_ISDIR(found.st_mode) || found.st_uid != geteuid()) {
        return fail(ErrorCode::no_permission,
                    fmt::format("{} is not a folder of this user; remove it", dir.string()));
    }
    if (chmod(dir.c_str(), 0700) != 0) {
        return failed_on(dir, "close to others", errno);
    }
    return {};
}

estimator::Result<FileDescriptor> take_lock(const std::filesystem::path& file) {
    FileDescriptor lock{::open(file.c_str(), O_RDWR | O_CREAT | O_CLOEXEC | O_NOFOLLOW, 0600)};
    if (lock.get() < 0) {
        return failed_on(file, "open", errno);
    }
    if (flock(lock.get(), LOCK_EX | LOCK_NB) != 0) {
        const int reason = errno;
        if (reason == EWOULDBLOCK) {
            return fail(ErrorCode::busy,
                        fmt::format("another sagittad of this user is recording already (it holds "
                                    "{}); stop it first: systemctl --user stop sagittad",
                                    file.string()));
        }
        return failed_on(file, "lock", reason);
    }
    return lock;
}

/// One connection: reads a line, answers it, until the client leaves. Owns itself.
class Client : public std::enable_shared_from_this<Client> {
public:
    Client(stream_protocol::socket socket, const ControlSocket::Answer& answer)
        : m_socket{std::move(socket)}, m_answer{answer} {}

    void read() {
        asio::async_read_until(m_socket, asio::dynamic_buffer(m_input, k_longest_request), '\n',
                               [self = shared_from_this()](error_code failed, std::size_t length) {
                                   self->on_line(failed, length);
                               });
    }

    void refuse_and_close(std::string_view why) { write(refusal(why), true); }

private:
    void on_line(error_code failed, std::size_t length) {
        if (failed == asio::error::not_found) {
            refuse_and_close("a request has at most 1024 bytes");
            return;
        }
        if (failed) {
            return; // the client has left
        }
        const std::string reply = m_answer(std::string_view{m_input}.substr(0, length - 1));
        m_input.erase(0, length);
        write(reply, false);
    }

    void write(std::string reply, bool then_close) {
        m_output = std::move(reply);
        m_output += '\n';
        asio::async_write(m_socket, asio::buffer(m_output),
                          [self = shared_from_this(), then_close](error_code failed, std::size_t) {
                              if (!failed && !then_close) {
                                  self->read();
                              }
                          });
    }

    stream_protocol::socket m_socket;
    const ControlSocket::Answer& m_answer;
    std::string m_input;
    std::string m_output;
};

} // namespace

struct ControlSocket::State {
    State(asio::io_context& loop, std::filesystem::path socket_path, FileDescriptor held,
          Answer replier)
        : path{std::move(socket_path)}, lock{std::move(held)}, answer{std::move(replier)},
          acceptor{loop}, retry{loop} {}

    void accept() {
        acceptor.async_accept([this](error_code failed, stream_protocol::socket socket) {
            if (failed == asio::error::operation_aborted) {
                return;
            }
            if (failed) {
                accept_later();
                return;
            }
            serve(std::move(socket));
            accept();
        });
    }

    // Out of descriptors: asking again at once would spin.
    void accept_later() {
        retry.expires_after(std::chrono::seconds{1});
        retry.async_wait([this](error_code failed) {
            if (!failed) {
                accept();
            }
        });
    }

    void serve(stream_protocol::socket socket) {
        auto client = std::make_shared<Client>(std::move(socket), answer);
        auto gone = [](const std::weak_ptr<Client>& other) { return other.expired(); };
        clients.erase(std::remove_if(clients.begin(), clients.end(), gone), clients.end());
        if (clients.size() >= k_most_clients) {
            client->refuse_and_close("16 clients are connected already; close one");
            return;
        }
        clients.push_back(client);
        client->read();
    }

    std::filesystem::path path;
    FileDescriptor lock;
    Answer answer;
    stream_protocol::acceptor acceptor;
    asio::steady_timer retry;
    std::vector<std::weak_ptr<Client>> clients;
};

estimator::Result<std::unique_ptr<ControlSocket>>
ControlSocket::listen(asio::io_context& loop, const std::filesystem::path& dir, Answer answer) {
    const std::filesystem::path path = dir / "control";
    if (path.native().size() >= sizeof(sockaddr_un::sun_path)) {
        return fail(ErrorCode::bad_value,
                    fmt::format("the path {} is too long for a socket (107 bytes); set a shorter "
                                "$XDG_RUNTIME_DIR",
                                path.string()));
    }
    if (auto made = make_private_dir(dir); !made) {
        return tl::unexpected{made.error()};
    }
    auto lock = take_lock(dir / "lock");
    if (!lock) {
        return tl::unexpected{lock.error()};
    }
    // Under the lock a socket found here has no owner any more.
    ::unlink(path.c_str());

    auto state = std::make_unique<State>(loop, path, std::move(*lock), std::move(answer));
    error_code error;
    state->acceptor.open(stream_protocol{}, error);
    if (!error) {
        state->acceptor.bind(stream_protocol::endpoint{path.string()}, error);
    }
    if (!error) {
        state->acceptor.listen(static_cast<int>(k_most_clients), error);
    }
    if (error) {
        return failed_on(path, "listen on", error.value());
    }
    state->accept();
    return std::unique_ptr<ControlSocket>{new ControlSocket{std::move(state)}};
}

ControlSocket::ControlSocket(std::unique_ptr<State> state) : m_state{std::move(state)} {}

ControlSocket::~ControlSocket() {
    ::unlink(m_state->path.c_str());
}

std::filesystem::path default_control_dir() {
    const char* runtime_dir = std::getenv("XDG_RUNTIME_DIR");
    if (runtime_dir == nullptr || *runtime_dir != '/') {
        return {};
    }
    return std::filesystem::path{runtime_dir} / "sagitta";
}

} // namespace sagitta::daemon
