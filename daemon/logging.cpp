#include "daemon/logging.hpp"

#include <cstdlib>
#include <spdlog/pattern_formatter.h>
#include <spdlog/sinks/stdout_sinks.h>
#include <string_view>
#include <sys/stat.h>
#include <unistd.h>

namespace sagitta::daemon {

namespace {

class PriorityFlag final : public spdlog::custom_flag_formatter {
public:
    void format(const spdlog::details::log_msg& message, const std::tm& /*time*/,
                spdlog::memory_buf_t& out) override {
        out.push_back('<');
        out.push_back(static_cast<char>('0' + journal_priority(message.level)));
        out.push_back('>');
    }
    [[nodiscard]] std::unique_ptr<custom_flag_formatter> clone() const override {
        return std::make_unique<PriorityFlag>();
    }
};

std::unique_ptr<spdlog::formatter> journal_formatter() {
    auto formatter = std::make_unique<spdlog::pattern_formatter>();
    formatter->add_flag<PriorityFlag>('*');
    formatter->set_pattern("%*%v");
    return formatter;
}

} // namespace

bool stderr_is_journal() {
    const char* stream = std::getenv("JOURNAL_STREAM");
    struct stat found {};
    if (stream == nullptr || fstat(STDERR_FILENO, &found) != 0) {
        return false;
    }
    return std::string_view{stream} ==
           std::to_string(found.st_dev) + ":" + std::to_string(found.st_ino);
}

int journal_priority(spdlog::level::level_enum level) {
    switch (level) {
    case spdlog::level::critical:
        return 2;
    case spdlog::level::err:
        return 3;
    case spdlog::level::warn:
        return 4;
    case spdlog::level::info:
        return 6;
    default:
        return 7;
    }
}

std::shared_ptr<spdlog::logger> make_logger(const std::string& level, bool journal) {
    auto sink = std::make_shared<spdlog::sinks::stderr_sink_st>();
    auto log = std::make_shared<spdlog::logger>("sagittad", std::move(sink));
    if (journal) {
        log->set_formatter(journal_formatter());
    } else {
        log->set_pattern("%Y-%m-%dT%H:%M:%S%z %l: %v");
    }
    set_level(*log, level);
    return log;
}

void set_level(spdlog::logger& log, const std::string& level) {
    log.set_level(spdlog::level::from_str(level));
}

} // namespace sagitta::daemon
