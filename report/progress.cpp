#include "report/progress.hpp"

#include "report/table.hpp"

#include <cstdio>
#include <fmt/format.h>

namespace sagitta::report {

Progress::~Progress() {
    if (m_written) {
        std::fputs("\r\033[K", stderr);
    }
}

bool Progress::due() {
    if (!m_shown) {
        return false;
    }
    const auto now = std::chrono::steady_clock::now();
    if (now < m_next) {
        return false;
    }
    m_next = now + std::chrono::milliseconds{200};
    return true;
}

void Progress::say(const std::string& text) {
    if (!m_shown) {
        return;
    }
    const std::string line = fmt::format("\r\033[K{}", shortened(text, 78));
    std::fputs(line.c_str(), stderr);
    std::fflush(stderr);
    m_written = true;
}

} // namespace sagitta::report
