// The numbers that decide what a movement is and how it is scored. The defaults are the program's
// defaults; config/sagitta.yaml explains each.
#pragma once

#include "estimator/units.hpp"

namespace sagitta::estimator {

struct SegmentationRules {
    Micros rest = std::chrono::milliseconds{200};
    Pixels min_distance = Pixels::of(20.0);
    Micros max_movement_time = std::chrono::milliseconds{4000};
    Micros max_dwell = std::chrono::milliseconds{1000};
    /// A press this soon and this near after the last one is a repeat (a double click).
    Micros repeat_time = std::chrono::milliseconds{400};
    Pixels repeat_distance = Pixels::of(5.0);
    /// Motion between press and release from which the press counts as a drag.
    Pixels drag_distance = Pixels::of(5.0);
};

struct ScoreRules {
    /// Crossings and changes of direction smaller than the wider of these are not counted.
    Pixels dead_band = Pixels::of(2.0);
    double dead_band_share = 0.01; ///< of the distance
    /// Target width that implied throughput is computed with.
    Pixels reference_width = Pixels::of(20.0);
};

struct Rules {
    SegmentationRules segmentation;
    ScoreRules scores;
};

} // namespace sagitta::estimator
