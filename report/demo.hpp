// sagitta demo: weeks of a simulated desk through the real pipeline into a store of its own.
#pragma once

#include "report/session.hpp"

namespace sagitta::report {

struct DemoRequest {
    int weeks = 6; ///< 1 to 52, up to the last full ISO week
    std::uint64_t seed = 1;
};

/// Where the demo's data go when no store is named: demo.db beside the person's own store.
[[nodiscard]] std::filesystem::path demo_file();

/// Replaces the demo's own store; a store named by the person must not exist yet.
[[nodiscard]] Result<Output> run_demo(const DemoRequest& request, const Session& session);

} // namespace sagitta::report
