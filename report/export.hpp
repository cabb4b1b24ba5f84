// sagitta export: every row of the store, for other programs.
#pragma once

#include "report/rows.hpp"
#include "report/session.hpp"

namespace sagitta::report {

enum class ExportTable { movements, hours };

struct ExportRequest {
    ExportTable table = ExportTable::movements;
    RowFormat format = RowFormat::csv;
    std::optional<std::string> from; ///< time of press or hour, from here on
    std::optional<std::string> to;   ///< up to here, itself left out
    std::optional<std::string> pointer;
};

/// Column names in their order.
[[nodiscard]] std::vector<std::string> movement_columns();
[[nodiscard]] std::vector<std::string> hour_columns();

/// Writes the rows to `out`; memory does not grow with them.
[[nodiscard]] Result<Output> run_export(const ExportRequest& request, const Session& session,
                                        std::FILE* out);

} // namespace sagitta::report
