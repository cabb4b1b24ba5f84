// Whether the person whose pointers these are sits at the seat now, by logind. One thread.
#pragma once

#include <boost/asio/io_context.hpp>
#include <functional>
#include <memory>

namespace sagitta::daemon {

class SessionActivity {
public:
    /// Where logind does not run, or knows nothing of this user, the session is always active.
    /// @param changed  called in the loop with the new state
    SessionActivity(boost::asio::io_context& loop, std::function<void(bool active)> changed);
    ~SessionActivity();
    SessionActivity(const SessionActivity&) = delete;
    SessionActivity& operator=(const SessionActivity&) = delete;

    [[nodiscard]] bool active() const;

private:
    struct State;
    std::unique_ptr<State> m_state;
};

} // namespace sagitta::daemon
