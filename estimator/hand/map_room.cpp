#include "estimator/hand/desk.hpp"

#include <algorithm>

namespace sagitta::estimator::hand {

DeskPlan map_room_desk(std::uint64_t seed, int weeks, std::chrono::sys_days first_day) {
    DeskPlan plan;
    plan.seed = seed;
    plan.first_day = first_day;
    plan.days = 7 * std::max(weeks, 1);
    plan.utc_offset = std::chrono::hours{1};
    plan.course.practice = 0.05;
    plan.course.fatigue = 0.04;

    DeskPointer mouse;
    mouse.description.name = "Upright mouse";
    mouse.description.kind = PointerKind::mouse;
    mouse.electronics.cpi = Cpi::of(1000.0);
    mouse.electronics.reports_per_s = 125.0;

    DeskPointer trackball;
    trackball.description.name = "Thumb trackball";
    trackball.description.kind = PointerKind::trackball;
    trackball.electronics.cpi = Cpi::of(800.0);
    trackball.electronics.reports_per_s = 125.0;
    trackball.effect.performance = 0.93;
    trackball.effect.lateral = 1.2;
    plan.pointers = {mouse, trackball};

    // Pairs of working days: a coin decides which pointer comes first in each.
    Random coin{seed, 0xc01U};
    const int pairs = (5 * plan.days / 7 + 1) / 2;
    for (int pair = 0; pair < pairs; ++pair) {
        const std::uint8_t first = coin.chance(0.5) ? 0 : 1;
        const std::uint8_t second = first == 0 ? 1 : 0;
        for (const std::uint8_t pointer : {first, first, second, second}) {
            plan.half_days.push_back(static_cast<PointerIndex>(pointer));
        }
    }
    return plan;
}

} // namespace sagitta::estimator::hand
