// What a replay found, and its screen. Pure: totals in, text out.
#pragma once

#include "estimator/hour_summary.hpp"
#include "report/session.hpp"

#include <string>
#include <vector>

namespace sagitta::report {

/// One recording that was replayed to its end.
struct ReplayedRecording {
    std::string file;
    std::string format; ///< "raw", "evemu" or "libinput-record"
    std::vector<std::string> pointers;
    std::optional<UtcTime> start; ///< nothing when its stamps cannot be placed in time
    std::uint64_t reports = 0;
    estimator::HourSummary totals;
    std::vector<std::string> remarks;
};

struct ReplaySummary {
    std::vector<ReplayedRecording> recordings;
    std::string store_file; ///< "" when nothing was stored
    bool cpi_assumed = false;

    [[nodiscard]] std::uint64_t reports() const;
    [[nodiscard]] estimator::HourSummary totals() const;
};

[[nodiscard]] std::string replay_text(const ReplaySummary& summary, const Session& session);
[[nodiscard]] std::string replay_json(const ReplaySummary& summary);

} // namespace sagitta::report
