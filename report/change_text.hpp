// What the charts of daily values say, in sentences.
#pragma once

#include "report/week_summary.hpp"

#include <string>

namespace sagitta::report {

/// "One change is flagged below.", "No change is flagged."; empty when nothing could be watched.
[[nodiscard]] std::string flags_in_short(const WeekSummary& week);
/// The flagged changes of one pointer and condition, or that there are none, or why none can be;
/// then each trend whose interval leaves out zero. Paragraphs to stand under the heading.
[[nodiscard]] std::string change_lines(const SeriesWeek& series, const WeekSummary& week);
/// How a flag comes about and how often by chance; empty when nothing could be watched.
[[nodiscard]] std::string flag_note(const WeekSummary& week);

} // namespace sagitta::report
