#include "daemon/control_socket.hpp"
#include "support.hpp"

#include <boost/asio/io_context.hpp>
#include <boost/asio/local/stream_protocol.hpp>
#include <boost/asio/read_until.hpp>
#include <boost/asio/write.hpp>
#include <doctest/doctest.h>
#include <sys/stat.h>
#include <unistd.h>

using namespace sagitta;
namespace asio = boost::asio;
using asio::local::stream_protocol;

namespace {

/// A client on the same loop as the server.
class Client {
public:
    Client(asio::io_context& loop, const std::filesystem::path& dir)
        : m_loop{loop}, m_socket{loop} {
        m_socket.connect(stream_protocol::endpoint{(dir / "control").string()});
    }
    void send(const std::string& text) {
        boost::system::error_code ignored;
        asio::write(m_socket, asio::buffer(text), ignored);
    }
    /// The next line, or "closed".
    std::string line() {
        std::string result;
        bool ended = false;
        asio::async_read_until(m_socket, asio::dynamic_buffer(m_input), '\n',
                               [&](boost::system::error_code failed, std::size_t length) {
                                   ended = true;
                                   result = failed ? "closed" : m_input.substr(0, length - 1);
                                   m_input.erase(0, length);
                               });
        while (!ended) {
            m_loop.run_one();
        }
        return result;
    }

private:
    asio::io_context& m_loop;
    stream_protocol::socket m_socket;
    std::string m_input;
};

std::string echo(std::string_view request) {
    return "<" + std::string{request} + ">";
}

} // namespace

TEST_CASE("several clients are answered line by line, also when lines arrive together or cut") {
    const test::TempDir dir;
    asio::io_context loop;
    const auto control = daemon::ControlSocket::listen(loop, dir.path() / "sagitta", echo);
    REQUIRE(control);
    Client first{loop, dir.path() / "sagitta"};
    Client second{loop, dir.path() / "sagitta"};
    first.send("one\ntwo\nthr");
    second.send("other\n");
    CHECK(first.line() == "<one>");
    CHECK(second.line() == "<other>");
    CHECK(first.line() == "<two>");
    first.send("ee\n");
    CHECK(first.line() == "<three>");
}

TEST_CASE("only the user can reach the socket, and it is removed at the end") {
    const test::TempDir dir;
    asio::io_context loop;
    {
        const auto control = daemon::ControlSocket::listen(loop, dir.path() / "sagitta", echo);
        REQUIRE(control);
        struct stat found {};
        REQUIRE(stat((dir.path() / "sagitta").c_str(), &found) == 0);
        CHECK((found.st_mode & 0777) == 0700);
        CHECK(std::filesystem::exists(dir.path() / "sagitta/control"));
    }
    CHECK_FALSE(std::filesystem::exists(dir.path() / "sagitta/control"));
}

TEST_CASE("a second daemon is refused, and the first one is left alone") {
    const test::TempDir dir;
    asio::io_context loop;
    const auto first = daemon::ControlSocket::listen(loop, dir.path() / "sagitta", echo);
    REQUIRE(first);
    const auto second = daemon::ControlSocket::listen(loop, dir.path() / "sagitta", echo);
    REQUIRE_FALSE(second);
    CHECK(second.error().code == estimator::ErrorCode::busy);
    CHECK(second.error().message.find("another sagittad") != std::string::npos);
    Client client{loop, dir.path() / "sagitta"};
    client.send("still here\n");
    CHECK(client.line() == "<still here>");
}

TEST_CASE("a socket left by a killed daemon is replaced") {
    const test::TempDir dir;
    asio::io_context loop;
    std::filesystem::create_directory(dir.path() / "sagitta");
    {
        stream_protocol::acceptor left{
            loop, stream_protocol::endpoint{(dir.path() / "sagitta/control").string()}};
    }
    REQUIRE(std::filesystem::exists(dir.path() / "sagitta/control"));
    const auto control = daemon::ControlSocket::listen(loop, dir.path() / "sagitta", echo);
    REQUIRE(control);
    Client client{loop, dir.path() / "sagitta"};
    client.send("hello\n");
    CHECK(client.line() == "<hello>");
}

TEST_CASE("a line without end is cut off, and others are served on") {
    const test::TempDir dir;
    asio::io_context loop;
    const auto control = daemon::ControlSocket::listen(loop, dir.path() / "sagitta", echo);
    REQUIRE(control);
    Client endless{loop, dir.path() / "sagitta"};
    endless.send(std::string(5000, 'x'));
    CHECK(endless.line().find("at most 1024 bytes") != std::string::npos);
    CHECK(endless.line() == "closed");
    Client other{loop, dir.path() / "sagitta"};
    other.send("hello\n");
    CHECK(other.line() == "<hello>");
}

TEST_CASE("the seventeenth client is refused until one leaves") {
    const test::TempDir dir;
    asio::io_context loop;
    const auto control = daemon::ControlSocket::listen(loop, dir.path() / "sagitta", echo);
    REQUIRE(control);
    std::vector<std::unique_ptr<Client>> clients;
    for (std::size_t i = 0; i < daemon::k_most_clients; ++i) {
        clients.push_back(std::make_unique<Client>(loop, dir.path() / "sagitta"));
        clients.back()->send("hello\n");
        REQUIRE(clients.back()->line() == "<hello>");
    }
    Client late{loop, dir.path() / "sagitta"};
    CHECK(late.line().find("16 clients") != std::string::npos);
    clients.clear();
    loop.poll();
    Client later{loop, dir.path() / "sagitta"};
    later.send("hello\n");
    CHECK(later.line() == "<hello>");
}

TEST_CASE("a path too long for a socket, and a folder that is a link, are refused in words") {
    const test::TempDir dir;
    asio::io_context loop;
    const auto too_long =
        daemon::ControlSocket::listen(loop, dir.path() / std::string(120, 'd'), echo);
    REQUIRE_FALSE(too_long);
    CHECK(too_long.error().code == estimator::ErrorCode::bad_value);

    std::filesystem::create_directory_symlink("/tmp", dir.path() / "link");
    const auto link = daemon::ControlSocket::listen(loop, dir.path() / "link", echo);
    REQUIRE_FALSE(link);
    CHECK(link.error().code == estimator::ErrorCode::no_permission);

    const auto missing = daemon::ControlSocket::listen(loop, dir.path() / "no/parent", echo);
    REQUIRE_FALSE(missing);
    CHECK(missing.error().message.find("XDG_RUNTIME_DIR") != std::string::npos);
}
