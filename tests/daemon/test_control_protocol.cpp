#include "daemon/control_protocol.hpp"

#include <doctest/doctest.h>
#include <nlohmann/json.hpp>

using namespace sagitta;
using nlohmann::json;

namespace {

class FakeTarget final : public daemon::ControlTarget {
public:
    [[nodiscard]] daemon::Status status() const override { return state; }
    void pause() override { calls += "pause "; }
    void resume() override { calls += "resume "; }
    [[nodiscard]] estimator::Result<void> label(const std::string& text) override {
        calls += "label<" + text + "> ";
        return {};
    }
    [[nodiscard]] estimator::Result<void> flush() override {
        calls += "flush ";
        return flush_result;
    }

    daemon::Status state;
    std::string calls;
    estimator::Result<void> flush_result;
};

json ask(daemon::ControlTarget& target, std::string_view request) {
    const std::string reply = daemon::answer(target, request);
    CHECK(reply.find('\n') == std::string::npos);
    return json::parse(reply);
}

} // namespace

TEST_CASE("each request calls what it names") {
    FakeTarget target;
    CHECK(ask(target, "pause")["ok"] == true);
    CHECK(ask(target, "resume\r")["ok"] == true);
    CHECK(ask(target, "label  upright mouse ")["ok"] == true);
    CHECK(ask(target, "label")["ok"] == true);
    CHECK(ask(target, "flush")["ok"] == true);
    CHECK(target.calls == "pause resume label<upright mouse> label<> flush ");
}

TEST_CASE("status tells every outcome, and survives names that are not UTF-8") {
    FakeTarget target;
    target.state.state = "recording";
    target.state.outcomes[static_cast<std::size_t>(estimator::Outcome::too_short)] = 7;
    target.state.pointers.push_back({"mouse \xff", "mouse", 1600.0, "config", true});
    const json told = ask(target, "status");
    CHECK(told["state"] == "recording");
    CHECK(told["outcomes"].size() == estimator::k_outcomes);
    CHECK(told["outcomes"]["too_short"] == 7);
    CHECK(told["pointers"][0]["cpi"] == 1600.0);
    CHECK(told["pointers"][0]["name"] == "mouse \xef\xbf\xbd");
    CHECK(told["write_failure"].is_null());
}

TEST_CASE("a failure is answered with its sentence") {
    FakeTarget target;
    target.flush_result = estimator::fail(estimator::ErrorCode::no_space, "the disk is full");
    const json told = ask(target, "flush");
    CHECK(told["ok"] == false);
    CHECK(told["error"] == "the disk is full");
}

TEST_CASE("garbage is refused and calls nothing") {
    FakeTarget target;
    const std::string long_label = "label " + std::string(daemon::k_longest_label + 1, 'x');
    for (const std::string& request :
         {std::string{}, std::string{" "}, std::string{"\0\xff\xfe", 3}, std::string{"pause now"},
          std::string{"PAUSE"}, std::string{"label \xff"},
          std::string{"label a\x01"
                      "b"},
          long_label}) {
        const json told = ask(target, request);
        CHECK(told["ok"] == false);
        CHECK(told["error"].is_string());
    }
    CHECK(target.calls.empty());
}
