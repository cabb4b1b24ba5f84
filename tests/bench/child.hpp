// What the benches share that measure processes: running one and what it cost.
#pragma once

#include <functional>
#include <string>
#include <vector>

namespace sagitta::bench {

struct Cost {
    double wall_s;
    double cpu_s; ///< user and system
    int exit_code;
};

/// Writes a sentence to standard error and ends the bench with 1.
[[noreturn]] void give_up(const std::string& why);

/// Runs a function in a process of its own; 0 is its exit code.
[[nodiscard]] Cost measure(const std::function<void()>& child);
/// Runs a program whose output nobody reads. @param command  the program's file and its arguments
[[nodiscard]] Cost measure_program(const std::vector<std::string>& command);

} // namespace sagitta::bench
