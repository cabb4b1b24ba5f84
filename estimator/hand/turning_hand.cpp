#include "estimator/hand/turning_hand.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace sagitta::estimator::hand {

namespace {

constexpr std::size_t k_max_strokes = 8;
constexpr double k_lateral_share = 0.35; // of a stroke's spread along its axis

Point turned(Point v, double angle) {
    const double c = std::cos(angle);
    const double s = std::sin(angle);
    return {c * v.x_mm - s * v.y_mm, s * v.x_mm + c * v.y_mm};
}

/// One stroke of the rigid body, from heading to heading.
struct Stroke {
    Point translation; ///< of the pivot, world
    Point bow;         ///< of the pivot, world
    double heading;
    double turn;
    double sway;

    [[nodiscard]] Pose at(double share) const {
        const double s = minimum_jerk(share);
        const double arc = 4.0 * s * (1.0 - s);
        return {{translation.x_mm * s + bow.x_mm * arc, translation.y_mm * s + bow.y_mm * arc},
                heading + turn * s + sway * arc};
    }
};

/// Errors of one stroke, drawn before it is known where the sensor sits, so that all places can
/// be compared on the same errors.
struct Errors {
    double along, across, bow, turn, sway;
};

Errors draw_errors(Random& random) {
    Errors errors{};
    for (double* error : {&errors.along, &errors.across, &errors.bow, &errors.turn, &errors.sway}) {
        *error = random.normal();
    }
    return errors;
}

/// Appends what the sensor reads during the stroke.
void read_stroke(const Stroke& stroke, Point arm, double duration_s, std::vector<Point>& places) {
    const int steps = std::max(1, static_cast<int>(std::lround(duration_s / k_turning_step_s)));
    Point reading = places.back();
    Pose last = stroke.at(0.0);
    for (int i = 1; i <= steps; ++i) {
        const Pose next = stroke.at(i / static_cast<double>(steps));
        const Sweep sweep{{next.pivot.x_mm - last.pivot.x_mm, next.pivot.y_mm - last.pivot.y_mm},
                          last.heading,
                          next.heading - last.heading};
        const Point read = sweep_reading(sweep, arm, 1.0);
        reading = {reading.x_mm + read.x_mm, reading.y_mm + read.y_mm};
        places.push_back(reading);
        last = next;
    }
}

} // namespace

Point TurningPath::position_at(double time_s) const noexcept {
    const double place = std::max(0.0, time_s / k_turning_step_s);
    const auto below = static_cast<std::size_t>(place);
    if (below + 1 >= places.size()) {
        return places.back();
    }
    return weighted_reading(places[below], places[below + 1], place - static_cast<double>(below));
}

TurningPath aim_turning(const Person& person, const Form& form, const AimTask& task,
                        const Grip& grip, Point sensor, Random& random) {
    const Point arm{sensor.x_mm - grip.pivot.x_mm, sensor.y_mm - grip.pivot.y_mm};
    const Point target =
        turned({task.distance.value(), 0.0}, task.direction.value() * std::numbers::pi / 180.0);
    const double width = task.width.value();
    const double rate = person.index_of_performance.value() * form.performance;

    TurningPath path;
    path.places.push_back({});
    path.strokes = 0;
    double heading = 0.0;
    double motion = 0.0;
    while (path.strokes < k_max_strokes) {
        const Point at = path.places.back();
        const Point rest{target.x_mm - at.x_mm, target.y_mm - at.y_mm};
        const double reach = std::hypot(rest.x_mm, rest.y_mm);
        if (reach <= 0.5 * width) {
            break;
        }
        const bool primary = path.strokes == 0;
        const Errors errors = draw_errors(random);
        const double spread = primary ? person.primary_spread : person.correction_spread;
        const double bias = primary ? -person.primary_undershoot : 0.0;
        const double growth = std::pow(reach / k_noise_distance.value(), person.lateral_growth);
        const double aside = k_lateral_share * spread * errors.across;
        const double bow = person.lateral_noise * form.lateral * k_noise_distance.value() * growth /
                           reach * errors.bow;
        // The hand pushes in the device's present axes; vision has taught it where they point.
        const Point ahead = turned(rest, heading);
        const Point left = turned(ahead, std::numbers::pi / 2.0);
        const double along = 1.0 + bias + spread * errors.along;
        const Stroke stroke{
            {ahead.x_mm * along + left.x_mm * aside, ahead.y_mm * along + left.y_mm * aside},
            {left.x_mm * bow, left.y_mm * bow},
            heading,
            grip.turn_sd * growth * errors.turn,
            grip.sway_sd * growth * errors.sway};
        const double duration =
            (k_stroke_latency_s + std::log2(reach / width + 1.0) / rate) * form.time;
        read_stroke(stroke, arm, duration, path.places);
        heading += stroke.turn;
        motion += duration;
        ++path.strokes;
    }
    path.press_s = motion + random.log_normal(seconds(person.dwell), person.dwell_spread);
    return path;
}

} // namespace sagitta::estimator::hand
