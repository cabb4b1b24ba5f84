// sagitta record: a live pointer into a raw file.
#pragma once

#include "report/session.hpp"

#include <chrono>

namespace sagitta::report {

struct RecordRequest {
    std::filesystem::path file;
    std::optional<std::string> pointer; ///< name, part of it, or node; nothing: the only pointer
    std::optional<std::chrono::duration<double>> length; ///< nothing: until SIGINT or SIGTERM
};

[[nodiscard]] Result<Output> run_record(const RecordRequest& request, const Session& session);

} // namespace sagitta::report
