// From a path to its scores.
#pragma once

#include "estimator/movement.hpp"
#include "estimator/path.hpp"
#include "estimator/rules.hpp"
#include "estimator/submovements.hpp"

#include <vector>

namespace sagitta::estimator {

/// Submovements are looked for in a velocity that is filtered once more, zero-phase, to this: above
/// it lies the hand's tremor (8 to 12 Hz), which is no submovement and which a coarse sensor does
/// not see. Cutoffs of 5 to 10 Hz are usual for aimed movements (from memory).
constexpr double k_submovement_cutoff_hz = 6.0;

/// A piece of speed must stand out by this much, whatever the peak: over a tenth of a second it is
/// about one step of a 400 CPI sensor, and no less could be seen by one.
constexpr MillimetresPerSecond k_least_prominence = MillimetresPerSecond::of(0.6);

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
    Submovements find_pieces(const Path& path, double cosine, double sine);

    LowPass m_tremor_filter;
    std::vector<double> m_vx; ///< mm/s, the whole padded run
    std::vector<double> m_vy;
    std::vector<double> m_along;          ///< px
    std::vector<double> m_across;         ///< px, + = left
    std::vector<double> m_along_velocity; ///< mm/s
    std::vector<double> m_thinned;        ///< mm/s
};

} // namespace sagitta::estimator
