// From a path to its scores.
#pragma once

#include "estimator/movement.hpp"
#include "estimator/path.hpp"
#include "estimator/rules.hpp"
#include "estimator/submovements.hpp"

#include <span>
#include <vector>

namespace sagitta::estimator {

/// Changes of direction, axis crossings and submovements are looked for in a path that is filtered
/// once more, zero-phase, to this: above it lies the hand's tremor (8 to 12 Hz), which is none of
/// them and which a coarse sensor does not see. Cutoffs of 5 to 10 Hz are usual for aimed
/// movements (from memory).
constexpr double k_calm_cutoff_hz = 5.0;
/// A piece of speed must stand out by this much, whatever the peak: a bump that high and a tenth of
/// a second long covers 0.05 mm, less than one step of a 400 CPI sensor.
constexpr MillimetresPerSecond k_least_prominence = MillimetresPerSecond::of(1.0);

class Scorer {
public:
    Scorer();

    /// Scores a path that moved. Sets every measure but those that only the run knows:
    /// movement_time, dwell, reports, flags.
    ///
    /// The task axis runs from the origin to the press. Deviation, crossings and changes are taken
    /// over the samples between start and end; the speed measures likewise.
    /// @param path   peak speed > 0 and press != origin
    /// @param rules  the dead band
    [[nodiscard]] Scores score(const Path& path, const ScoreRules& rules);

private:
    /// Direction of the task axis.
    struct Axis {
        double cosine;
        double sine;
    };

    void turn(std::span<const double> x, std::span<const double> y, const Axis& axis);
    void score_turns(const Path& path, const Axis& axis, double band, Scores& scores);
    void score_submovements(const Path& path, const Axis& axis, Scores& scores);
    void score_smoothness(const Path& path, Scores& scores);

    LowPass m_calming_filter;
    std::vector<double> m_along;  ///< px
    std::vector<double> m_across; ///< px, + = left
    std::vector<double> m_calm_x; ///< the whole padded run
    std::vector<double> m_calm_y;
    std::vector<double> m_along_velocity; ///< mm/s
    std::vector<double> m_thinned;        ///< mm/s
};

} // namespace sagitta::estimator
