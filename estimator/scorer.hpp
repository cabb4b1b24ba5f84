// From a path to its scores.
#pragma once

#include "estimator/movement.hpp"
#include "estimator/path.hpp"
#include "estimator/rules.hpp"

#include <vector>

namespace sagitta::estimator {

class Scorer {
public:
    /// Scores a path that moved. Sets every measure but those that only the run knows:
    /// movement_time, dwell, reports, flags.
    ///
    /// The task axis runs from the origin to the press. Deviation, crossings and changes are taken
    /// over the samples between start and end; the speed measures likewise.
    /// @param path   peak speed > 0 and press != origin
    /// @param rules  the dead band
    [[nodiscard]] Scores score(const Path& path, const ScoreRules& rules);

private:
    std::vector<double> m_along;          ///< px
    std::vector<double> m_across;         ///< px, + = left
    std::vector<double> m_along_velocity; ///< mm/s
};

} // namespace sagitta::estimator
