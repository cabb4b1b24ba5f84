// Gain: screen px per count, constant (flat) or by hand speed (a table, for desktops that
// accelerate the pointer).
#pragma once

#include "estimator/result.hpp"
#include "estimator/units.hpp"

#include <vector>

namespace sagitta::estimator {

/// One point of a gain table.
struct GainPoint {
    MillimetresPerSecond speed; ///< >= 0, hand plane
    double factor;              ///< > 0, px per count
};

class Gain {
public:
    /// @param factor  px per count, finite, > 0
    /// @return ErrorCode::bad_value otherwise
    [[nodiscard]] static Result<Gain> flat(double factor);
    /// @param points  at least one, speeds strictly increasing
    /// @return ErrorCode::bad_value naming the first wrong point (counted from 1)
    [[nodiscard]] static Result<Gain> table(std::vector<GainPoint> points);
    /// Gain 1: one px a count.
    [[nodiscard]] static Gain unity();

    [[nodiscard]] bool is_flat() const noexcept { return m_points.size() == 1; }
    /// The same factors at speeds `ratio` times as high. @param ratio  finite, > 0
    [[nodiscard]] Gain with_speeds_times(double ratio) const;
    /// Linear between the table's points, constant beyond them.
    [[nodiscard]] double factor_at(MillimetresPerSecond speed) const noexcept;

private:
    explicit Gain(std::vector<GainPoint> points) : m_points{std::move(points)} {}
    std::vector<GainPoint> m_points;
};

} // namespace sagitta::estimator
