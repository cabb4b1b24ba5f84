// Days of everyday work by a simulated hand, through the real pipeline, beside the truth of them.
#pragma once

#include "estimator/hand/desk.hpp"
#include "truth_sums.hpp"

#include <vector>

namespace sagitta::bench {

struct WorkPlan {
    std::uint64_t seed = 1;
    estimator::hand::Person person;
    estimator::hand::DeskPointer pointer;
    estimator::hand::Form other_effect; ///< of the device that this one is compared with
    estimator::Pixels target_width = estimator::Pixels::of(34.0); ///< median
    int days = 5;
    estimator::Micros half_day = std::chrono::minutes{20};
    /// Everyday work holds presses that take long, and the rules leave out what takes over 4 s.
    /// false: neither is so.
    bool slow_presses = true;
};

/// A pointer by its electronics, with one px to 1/1000 inch of the hand whatever its CPI.
[[nodiscard]] estimator::hand::DeskPointer make_pointer(double cpi, double reports_per_s,
                                                        const estimator::hand::Form& effect = {});

struct Worked {
    std::vector<Sums> days;
    std::uint64_t clicks = 0;
    std::uint64_t known_clicks = 0; ///< those whose target is known
};

/// Ends the program with a message when the plan is refused.
[[nodiscard]] Worked work(const WorkPlan& plan);

} // namespace sagitta::bench
