// One line on the terminal that says how far long work has come.
#pragma once

#include <chrono>
#include <string>

namespace sagitta::report {

/// Writes to standard error, and only when it is a terminal; the line is wiped at the end.
class Progress {
public:
    explicit Progress(bool shown) : m_shown{shown} {}
    ~Progress();
    Progress(const Progress&) = delete;
    Progress& operator=(const Progress&) = delete;

    /// True at most five times a second: time to say something.
    [[nodiscard]] bool due();
    void say(const std::string& text);

private:
    bool m_shown;
    bool m_written = false;
    std::chrono::steady_clock::time_point m_next{};
};

} // namespace sagitta::report
