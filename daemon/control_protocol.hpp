// The control socket's language: one line in, one line of JSON out. CONTROL.md describes it.
#pragma once

#include "estimator/movement.hpp"
#include "estimator/result.hpp"

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace sagitta::daemon {

struct PointerStatus {
    std::string name;
    std::string kind;
    double cpi;
    std::string cpi_source;
    bool open; ///< plugged in and being read
};

struct Status {
    std::string version;
    std::string state; ///< "recording", "no_pointer", "paused" or "session_inactive"
    std::string store_file;
    std::string condition; ///< "" = unlabelled
    std::vector<PointerStatus> pointers;
    std::vector<std::string> refused; ///< why a pointer that is there is not read
    std::uint64_t presses = 0;        ///< since the start, as are the outcomes
    estimator::OutcomeCounts outcomes{};
    bool unwritten = false;                   ///< a batch waits for its time
    std::optional<std::string> write_failure; ///< why the last write failed
    std::uint64_t lost_movements = 0;         ///< lost because writing failed for long
};

/// What can be asked of a recording.
class ControlTarget {
public:
    ControlTarget() = default;
    ControlTarget(const ControlTarget&) = delete;
    ControlTarget& operator=(const ControlTarget&) = delete;
    virtual ~ControlTarget() = default;

    [[nodiscard]] virtual Status status() const = 0;
    virtual void pause() = 0;
    virtual void resume() = 0;
    /// @param label  valid UTF-8 without control characters; "" = unlabelled
    [[nodiscard]] virtual estimator::Result<void> label(const std::string& label) = 0;
    /// Writes what waits, now.
    [[nodiscard]] virtual estimator::Result<void> flush() = 0;
};

constexpr std::size_t k_longest_label = 200;    ///< bytes
constexpr std::size_t k_longest_request = 1024; ///< bytes, newline included

/// Obeys a request, whatever bytes it holds.
/// @param request  without its newline
/// @return         one line of JSON without newline: {"ok":true,...} or {"ok":false,"error":"..."}
[[nodiscard]] std::string answer(ControlTarget& target, std::string_view request);
/// An answer that says no.
[[nodiscard]] std::string refusal(std::string_view error);

} // namespace sagitta::daemon
