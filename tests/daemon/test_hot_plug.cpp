#include "daemon/hot_plug.hpp"
#include "support.hpp"

#include <doctest/doctest.h>
#include <fstream>

using namespace sagitta;

TEST_CASE("a new node, a new permission and a lost node each call back") {
    const test::TempDir dir;
    const auto input_dir = dir.path() / "input";
    std::filesystem::create_directory(input_dir);
    boost::asio::io_context loop;
    int calls = 0;
    const auto watch = daemon::HotPlug::watch(loop, input_dir, [&] { ++calls; });
    REQUIRE(watch);
    loop.poll();
    const int before = calls;

    std::ofstream{input_dir / "event7"}.close();
    loop.poll();
    CHECK(calls == before + 1);
    std::filesystem::permissions(input_dir / "event7", std::filesystem::perms::owner_read);
    loop.poll();
    CHECK(calls == before + 2);
    std::filesystem::remove(input_dir / "event7");
    loop.poll();
    CHECK(calls == before + 3);
    loop.poll();
    CHECK(calls == before + 3); // quiet while nothing happens
}

TEST_CASE("a folder that appears later is watched from then on") {
    const test::TempDir dir;
    boost::asio::io_context loop;
    int calls = 0;
    const auto watch = daemon::HotPlug::watch(loop, dir.path() / "input", [&] { ++calls; });
    REQUIRE(watch);
    std::filesystem::create_directory(dir.path() / "input");
    loop.poll();
    CHECK(calls == 1);
    std::ofstream{dir.path() / "input/event0"}.close();
    loop.poll();
    CHECK(calls == 2);
}
