// sagitta week: one ISO week, read from hour rows only.
#pragma once

#include "report/session.hpp"
#include "report/week_summary.hpp"

namespace sagitta::report {

enum class WeekDetail { summary, by_direction, by_hour };

struct WeekRequest {
    std::optional<std::string> ending; ///< a date of the week; nothing: today
    WeekDetail detail = WeekDetail::summary;
};

/// Reads the week that holds `day`.
[[nodiscard]] Result<WeekSummary> read_week(const store::Store& store, Day day,
                                            const Session& session);

/// The screen. @param last_hour  start of the store's last hour, for an empty week
[[nodiscard]] std::string week_text(const WeekSummary& week, WeekDetail detail,
                                    const Session& session,
                                    std::optional<UtcTime> last_hour = std::nullopt);
/// The same as one JSON object; lengths, times and names carry their units.
[[nodiscard]] std::string week_json(const WeekSummary& week, WeekDetail detail,
                                    const Session& session);

[[nodiscard]] Result<Output> run_week(const WeekRequest& request, const Session& session);

} // namespace sagitta::report
