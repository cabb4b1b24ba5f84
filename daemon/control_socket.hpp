// The socket of `status`, `pause`, `resume`, `label` and `flush`: many clients, bounded input, one
// thread. Its lock also keeps a second daemon out.
#pragma once

#include "estimator/result.hpp"

#include <boost/asio/io_context.hpp>
#include <filesystem>
#include <functional>
#include <memory>
#include <string>
#include <string_view>

namespace sagitta::daemon {

constexpr std::size_t k_most_clients = 16;

class ControlSocket {
public:
    /// Answers one request line with one line, both without newline.
    using Answer = std::function<std::string(std::string_view)>;

    /// Makes `dir` (0700) with the socket `control` and the file `lock` in it; a socket left by a
    /// killed daemon is replaced.
    /// @return busy when another daemon holds the lock; no_permission; bad_value when the path is
    ///         too long for a socket; io
    [[nodiscard]] static estimator::Result<std::unique_ptr<ControlSocket>>
    listen(boost::asio::io_context& loop, const std::filesystem::path& dir, Answer answer);

    ControlSocket(const ControlSocket&) = delete;
    ControlSocket& operator=(const ControlSocket&) = delete;
    /// Removes the socket.
    ~ControlSocket();

private:
    struct State;
    explicit ControlSocket(std::unique_ptr<State> state);
    std::unique_ptr<State> m_state;
};

/// $XDG_RUNTIME_DIR/sagitta; empty when that is not set.
[[nodiscard]] std::filesystem::path default_control_dir();

} // namespace sagitta::daemon
