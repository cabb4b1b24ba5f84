#include "daemon/session_activity.hpp"

#include <boost/asio/posix/stream_descriptor.hpp>
#include <cstdlib>
#include <string_view>
#include <systemd/sd-login.h>
#include <unistd.h>

namespace sagitta::daemon {

namespace asio = boost::asio;

namespace {

struct MonitorDeleter {
    void operator()(sd_login_monitor* monitor) const { sd_login_monitor_unref(monitor); }
};
using Monitor = std::unique_ptr<sd_login_monitor, MonitorDeleter>;

// The documented test of sd-login(3).
bool logind_runs() {
    return access("/run/systemd/seats/", F_OK) >= 0;
}

// A user service belongs to no session, so the user's state is asked: "active" when one of their
// sessions is in the foreground; "online", "lingering" or "closing" when none is.
bool user_is_active() {
    char* state = nullptr;
    if (sd_uid_get_state(getuid(), &state) < 0) {
        return true;
    }
    const std::string_view text{state};
    const bool active = text == "active" || text == "offline";
    std::free(state);
    return active;
}

} // namespace

struct SessionActivity::State {
    State(asio::io_context& loop, std::function<void(bool)> callback)
        : changed{std::move(callback)}, waiter{loop} {}
    ~State() {
        if (waiter.is_open()) {
            waiter.release(); // the monitor's own
        }
    }
    State(const State&) = delete;
    State& operator=(const State&) = delete;

    void wait() {
        waiter.async_wait(asio::posix::stream_descriptor::wait_read,
                          [this](boost::system::error_code failed) {
                              if (failed) {
                                  return;
                              }
                              sd_login_monitor_flush(monitor.get());
                              wait();
                              if (user_is_active() != active) {
                                  active = !active;
                                  changed(active);
                              }
                          });
    }

    std::function<void(bool)> changed;
    Monitor monitor;
    asio::posix::stream_descriptor waiter;
    bool active = true;
};

SessionActivity::SessionActivity(asio::io_context& loop, std::function<void(bool)> changed)
    : m_state{std::make_unique<State>(loop, std::move(changed))} {
    if (!logind_runs()) {
        return;
    }
    sd_login_monitor* monitor = nullptr;
    if (sd_login_monitor_new("uid", &monitor) < 0) {
        return;
    }
    m_state->monitor.reset(monitor);
    boost::system::error_code error;
    m_state->waiter.assign(sd_login_monitor_get_fd(monitor), error);
    if (!error) {
        m_state->active = user_is_active();
        m_state->wait();
    }
}

SessionActivity::~SessionActivity() = default;

bool SessionActivity::active() const {
    return m_state->active;
}

} // namespace sagitta::daemon
