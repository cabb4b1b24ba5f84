// Simulated working days as the pipeline found them, to be stored again and again: other days, the
// same work.
#pragma once

#include "estimator/pipeline.hpp"
#include "store/recorder.hpp"

#include <variant>
#include <vector>

namespace sagitta::bench {

struct Press {
    estimator::PointerIndex pointer;
    estimator::PointerTime time;
    estimator::Button button;
};
struct WheelTurn {
    estimator::PointerIndex pointer;
    estimator::PointerTime time;
    std::uint32_t steps_120ths;
};
using Finding = std::variant<estimator::Movement, estimator::Exposure, Press, WheelTurn>;

struct DeskDay {
    std::vector<Finding> findings; ///< in the order of the pipeline
    std::size_t movements = 0;
};

/// Working days of the map room, each on one pointer; stamps are UTC.
struct DeskDays {
    std::vector<estimator::PointerDescription> pointers;
    std::vector<DeskDay> days;
    std::chrono::sys_days first_day;
};

[[nodiscard]] DeskDays simulate_days(int weeks);

/// Hands a finding to the recorder as the pipeline would.
void repeat(const Finding& finding, store::Recorder& recorder);
[[nodiscard]] estimator::PointerTime time_of(const Finding& finding);

} // namespace sagitta::bench
