// sagitta check: what keeps recording from working, and the command that mends it.
#pragma once

#include "report/devices.hpp"

#include <string>
#include <vector>

namespace sagitta::report {

/// What was looked up on this machine.
struct CheckFacts {
    std::optional<std::filesystem::path> config_file;
    std::optional<std::string> config_error;
    std::string time_zone_remark; ///< "" when the person's zone is known
    std::optional<std::string> pointers_error;
    std::vector<DeviceHere> pointers;
    std::vector<input::PointerNode> keyboard_pointers;
    bool udev_rule_installed = false;
    std::filesystem::path store_file;
    bool store_exists = false;
    std::optional<std::string> store_error;  ///< why it cannot be read
    bool store_writable = false;             ///< or can be made
    std::optional<std::string> daemon_error; ///< why it did not answer
    std::string daemon_state;                ///< as in its status
    std::vector<std::string> daemon_refused;
    std::optional<std::string> daemon_write_failure;
};

enum class Severity { fine, advice, trouble };

struct Finding {
    Severity severity;
    std::string what; ///< one sentence
    std::string mend; ///< a command or a step; "" when fine
};

/// Pure: facts in, findings out, in the order in which they are best mended.
[[nodiscard]] std::vector<Finding> judge(const CheckFacts& facts);

[[nodiscard]] std::string check_text(const std::vector<Finding>& findings, const Session& session);
[[nodiscard]] std::string check_json(const std::vector<Finding>& findings);

/// @param config_file, config_error  as main found them: a wrong config must not keep the check
///                                   from running
[[nodiscard]] Result<Output> run_check(const Session& session,
                                       std::optional<std::filesystem::path> config_file,
                                       std::optional<std::string> config_error);

} // namespace sagitta::report
