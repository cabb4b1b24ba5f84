#include "estimator/turns.hpp"

#include <algorithm>
#include <limits>

namespace sagitta::estimator {
namespace {

std::uint16_t saturated(std::size_t count) {
    constexpr std::size_t most = std::numeric_limits<std::uint16_t>::max();
    return static_cast<std::uint16_t>(std::min(count, most));
}

enum class Way { unknown, up, down };

} // namespace

std::uint16_t axis_crossings(std::span<const double> y_px, double band_px) noexcept {
    const double half = band_px / 2.0;
    std::size_t crossings = 0;
    int last_side = 0;
    for (const double y : y_px) {
        const int side = (y > half ? 1 : 0) - (y < -half ? 1 : 0);
        if (side == 0) {
            continue;
        }
        crossings += side == -last_side ? 1U : 0U;
        last_side = side;
    }
    return saturated(crossings);
}

std::uint16_t turning_points(std::span<const double> coordinate_px, double band_px) noexcept {
    if (coordinate_px.empty()) {
        return 0;
    }
    std::size_t turns = 0;
    Way way = Way::unknown;
    double highest = coordinate_px.front(); // since the last turn
    double lowest = coordinate_px.front();
    for (const double value : coordinate_px) {
        highest = std::max(highest, value);
        lowest = std::min(lowest, value);
        if (way != Way::up && value - lowest > band_px) {
            turns += way == Way::down ? 1U : 0U;
            way = Way::up;
            highest = value;
        } else if (way != Way::down && highest - value > band_px) {
            turns += way == Way::up ? 1U : 0U;
            way = Way::down;
            lowest = value;
        }
    }
    return saturated(turns);
}

} // namespace sagitta::estimator
