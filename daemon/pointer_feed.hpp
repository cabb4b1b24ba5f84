// What the recording session needs of live pointers beyond their reports: who came, who went, and
// a switch. A test puts its own in place.
#pragma once

#include "estimator/report_source.hpp"

#include <functional>
#include <string>
#include <vector>

namespace sagitta::daemon {

struct PointerChange {
    enum class Kind {
        plugged,   ///< open and being read
        unplugged, ///< vanished or failed
        refused    ///< there, but cannot be opened
    };
    Kind kind;
    estimator::PointerIndex pointer; ///< without meaning for `refused`
    std::string message;             ///< of the failure; empty for `plugged`
};

class PointerFeed : public estimator::ReportSource {
public:
    /// Says which pointers may be opened.
    using Filter = std::function<bool(const estimator::PointerDescription&)>;

    /// What changed in the last next(), in order. It took place after the reports that next()
    /// delivered, so process those first.
    [[nodiscard]] virtual std::vector<PointerChange> take_changes() = 0;
    /// Starts reading, or closes all pointers. Neither is a change to take.
    virtual void enable(bool on) = 0;
    /// Closes the pointers that the filter now refuses, and looks for others.
    virtual void set_filter(Filter filter) = 0;
    /// Why pointers that are there are not read now, one sentence each.
    [[nodiscard]] virtual std::vector<std::string> refused() const = 0;
    /// The pointer is open and being read.
    [[nodiscard]] virtual bool is_open(estimator::PointerIndex pointer) const = 0;
};

} // namespace sagitta::daemon
