#include "estimator/hand/work.hpp"

#include <algorithm>
#include <cmath>

namespace sagitta::estimator::hand {

namespace {

constexpr double k_nearest_px = 22.0; // farther than the shortest scored distance
constexpr double k_farthest_px = 2400.0;
constexpr double k_narrowest_px = 6.0;
constexpr double k_widest_px = 320.0;
constexpr std::uint16_t k_detent_120ths = 120;

Micros micros(double duration_s) {
    return Micros{std::llround(duration_s * 1e6)};
}

} // namespace

Work::Work(const DeskPlan& plan, PointerIndex pointer, Device& device, std::uint64_t seed,
           std::vector<AimedTruth>* truths)
    : m_plan{plan}, m_pointer{pointer}, m_device{device},
      m_mm_per_px{k_mm_per_inch / device.electronics().cpi.value() /
                  plan.pointers[static_cast<std::size_t>(pointer)].gain},
      m_random{seed, 0x30bU}, m_truths{truths} {}

Work::Done Work::perform(PointerTime start, const Form& form, ReportBatch& batch) {
    m_form = form;
    m_batch = &batch;
    if (m_roaming > 0) {
        --m_roaming;
        return {roam(start, AimedPath::k_max_submovements), m_roaming == 0};
    }
    const ActivityMix& mix = m_plan.activities;
    double left = m_random.uniform();
    const auto drawn = [&left](double share) {
        left -= share;
        return left < 0.0;
    };
    if (drawn(mix.wander)) {
        return {roam(start, 1 + m_random.below(3)), true};
    }
    if (drawn(mix.long_wander)) {
        m_roaming = 2 + m_random.below(6);
        return {roam(start, AimedPath::k_max_submovements), false};
    }
    if (drawn(mix.wheel)) {
        return {turn_wheel(start), true};
    }
    if (drawn(mix.drag)) {
        return {drag(start), true};
    }
    if (drawn(mix.double_click)) {
        return {double_click(start), true};
    }
    if (drawn(mix.still_press)) {
        return {still_press(start), true};
    }
    if (drawn(mix.clutch)) {
        return {clutch(start), true};
    }
    if (drawn(mix.short_move)) {
        const Target near{Pixels::of(m_random.uniform(3.0, 18.0)), Pixels::of(12.0)};
        return {click(start, aim_at(near), near), true};
    }
    const Target target = draw_target(1.0);
    if (drawn(mix.slow_press)) {
        m_form.time *= m_random.uniform(4.5, 7.0);
        return {click(start, aim_at(target), target), true};
    }
    AimedPath path = aim_at(target);
    if (drawn(mix.long_dwell)) {
        path.set_dwell(m_random.uniform(1.05, 4.0));
    }
    return {click(start, path, target), true};
}

Work::Target Work::draw_target(double distance_factor) {
    const TargetMix& mix = m_plan.targets;
    const double distance =
        m_random.log_normal(mix.distance.value() * distance_factor, mix.distance_spread);
    const double width = m_random.log_normal(mix.width.value(), mix.width_spread);
    const double reach = std::clamp(distance, k_nearest_px, k_farthest_px);
    return {Pixels::of(reach),
            Pixels::of(std::min(std::clamp(width, k_narrowest_px, k_widest_px), reach))};
}

Button Work::draw_button() {
    const double u = m_random.uniform();
    return u < 0.91 ? Button::left : (u < 0.98 ? Button::right : Button::middle);
}

AimedPath Work::aim_at(const Target& target) {
    const AimTask task{Millimetres::of(target.distance.value() * m_mm_per_px),
                       Degrees::of(m_random.uniform(0.0, 360.0)),
                       Millimetres::of(target.width.value() * m_mm_per_px)};
    return aim(m_plan.person, m_form, task, m_random);
}

double Work::px_of(const AimedPath& path) const {
    const Point end = path.end();
    return std::hypot(end.x_mm, end.y_mm) / m_mm_per_px;
}

PointerTime Work::arrive(const AimedPath& path, const Target& target, Button button,
                         PointerTime start, bool truth) {
    m_device.move(path, start, *m_batch);
    const PointerTime press = start + micros(path.press_s());
    m_device.press(press, button, *m_batch);
    if (truth && m_truths != nullptr) {
        m_truths->push_back(
            {m_pointer, MovementKind::click, start, press, Pixels::of(px_of(path)), target.width});
    }
    return press;
}

PointerTime Work::release(PointerTime press, Button button) {
    const PointerTime time = press + micros(m_random.log_normal(0.09, 0.25));
    m_device.release(time, button, *m_batch);
    return time;
}

PointerTime Work::click(PointerTime start, const AimedPath& path, const Target& target) {
    const Button button = draw_button();
    return release(arrive(path, target, button, start, true), button);
}

PointerTime Work::double_click(PointerTime start) {
    const Target target = draw_target(1.0);
    const PointerTime first =
        release(arrive(aim_at(target), target, Button::left, start, true), Button::left);
    const PointerTime second = first + micros(m_random.uniform(0.06, 0.16));
    m_device.press(second, Button::left, *m_batch);
    return release(second, Button::left);
}

PointerTime Work::drag(PointerTime start) {
    const Target object = draw_target(1.0);
    const PointerTime grip = arrive(aim_at(object), object, Button::left, start, true) +
                             micros(m_random.log_normal(0.15, 0.3));
    const Target place = draw_target(0.8);
    const AimedPath path = aim_at(place);
    m_device.move(path, grip, *m_batch);
    const PointerTime drop = grip + micros(path.press_s());
    m_device.release(drop, Button::left, *m_batch);
    if (m_truths != nullptr) {
        m_truths->push_back(
            {m_pointer, MovementKind::drag, grip, drop, Pixels::of(px_of(path)), place.width});
    }
    return drop;
}

PointerTime Work::clutch(PointerTime start) {
    const Target half = draw_target(2.0);
    const AimedPath first = aim_at(half);
    m_device.move(first, start, *m_batch);
    m_device.lift();
    const PointerTime again = start + micros(first.motion_s() + m_random.log_normal(0.22, 0.35));
    const Button button = draw_button();
    return release(arrive(aim_at(half), half, button, again, false), button);
}

PointerTime Work::still_press(PointerTime start) {
    const Button button = draw_button();
    m_device.press(start, button, *m_batch);
    return release(start, button);
}

PointerTime Work::turn_wheel(PointerTime start) {
    const std::size_t steps = 2 + m_random.below(14);
    PointerTime time = start;
    for (std::size_t i = 0; i < steps; ++i) {
        m_device.wheel(time, k_detent_120ths, *m_batch);
        time += micros(m_random.log_normal(0.07, 0.4));
    }
    return time;
}

PointerTime Work::roam(PointerTime start, std::size_t legs) {
    const AimedPath path =
        wander(m_plan.person, m_form, legs, Millimetres::of(150.0 * m_mm_per_px), m_random);
    m_device.move(path, start, *m_batch);
    return start + micros(path.motion_s());
}

} // namespace sagitta::estimator::hand
