#include "estimator/hand/aimed_path.hpp"

#include <algorithm>
#include <cmath>
#include <numbers>

namespace sagitta::estimator::hand {

namespace {

constexpr double k_degree = std::numbers::pi / 180.0;
constexpr double k_shortest_motion_s = 0.10;
constexpr double k_effective_width = 4.133; // We in SDs, ISO 9241-411
constexpr int k_max_corrections = 6;
/// A correction lasts this share of the primary submovement, and begins while the one before it
/// still brakes.
constexpr double k_correction_duration = 0.55;
constexpr double k_overlap = 0.12;

Point operator+(Point a, Point b) {
    return {a.x_mm + b.x_mm, a.y_mm + b.y_mm};
}
Point operator-(Point a, Point b) {
    return {a.x_mm - b.x_mm, a.y_mm - b.y_mm};
}
Point operator*(Point a, double factor) {
    return {a.x_mm * factor, a.y_mm * factor};
}
double length(Point v) {
    return std::hypot(v.x_mm, v.y_mm);
}

Point turned(Point v, double angle) {
    const double c = std::cos(angle);
    const double s = std::sin(angle);
    return {c * v.x_mm - s * v.y_mm, s * v.x_mm + c * v.y_mm};
}

Tremor draw_tremor(const Person& person, Random& random) {
    Tremor tremor;
    tremor.frequency_hz = random.uniform(person.tremor_low_hz, person.tremor_high_hz);
    const auto axis = [&](double& cosine, double& sine) {
        const double amplitude = person.tremor_amplitude.value() * random.log_normal(1.0, 0.4);
        const double phase = random.uniform(0.0, 2.0 * std::numbers::pi);
        cosine = amplitude * std::cos(phase);
        sine = amplitude * std::sin(phase);
    };
    axis(tremor.cosine.x_mm, tremor.sine.x_mm);
    axis(tremor.cosine.y_mm, tremor.sine.y_mm);
    return tremor;
}

/// How wild this movement is across its axis, in multiples of the person's figures: one movement
/// is made with more care than the next, throughout, and long ones bow less for their length.
double draw_wildness(const Person& person, const Form& form, double distance_mm, Random& random) {
    return form.lateral * random.log_normal(1.0, person.lateral_spread) *
           std::pow(distance_mm / k_noise_distance.value(), person.lateral_growth - 1.0);
}

/// Height of a random arc over a stroke of this length.
double draw_bow(const Person& person, double wildness, double length_mm, Random& random) {
    return person.lateral_noise * wildness * length_mm * random.normal();
}

double draw_movement_time(const Person& person, const Form& form, const AimTask& task,
                          Random& random) {
    const double spread = person.time_spread;
    // exp(spread z - spread^2 / 2) has mean 1, so the law holds for the mean.
    return lawful_time_s(person, form, task) *
           std::exp(spread * random.normal() - 0.5 * spread * spread);
}

/// Where the strokes end, in the task's own axes (x along, origin at the start). The last one is
/// where the button goes down.
struct Aims {
    std::array<Point, AimedPath::k_max_submovements> ends{};
    std::size_t count = 0;
    void add(Point end) { ends[count++] = end; }
};

Aims draw_aims(const Person& person, double wildness, double distance, double width,
               Random& random) {
    Aims aims;
    Point at;
    if (random.chance(person.detour_share)) {
        const double spread = person.detour_spread * wildness * distance;
        at = {distance * random.uniform(0.15, 0.7) + spread * random.normal(),
              spread * random.normal()};
        aims.add(at);
    }
    const double sd = person.endpoint_spread * width / k_effective_width;
    const Point press{distance + sd * random.normal(), sd * random.normal()};
    double spread = person.primary_spread;
    double bias = -person.primary_undershoot;
    for (int stroke = 0; stroke <= k_max_corrections; ++stroke) {
        const Point rest = press - at;
        const double reach = 1.0 + bias + spread * random.normal();
        const double aside = 0.35 * wildness * spread * random.normal();
        const Point end = at + rest * reach + turned(rest, std::numbers::pi / 2.0) * aside;
        if (stroke == k_max_corrections || length(press - end) <= 0.5 * width) {
            break;
        }
        aims.add(end);
        at = end;
        spread = person.correction_spread;
        bias = 0.0;
    }
    aims.add(press);
    return aims;
}

} // namespace

void AimedPath::add(const Submovement& submovement) noexcept {
    const double reach = length(submovement.by);
    // Unit vector to the left of the stroke.
    const Point left = reach > 0.0 ? turned(submovement.by, std::numbers::pi / 2.0) * (1.0 / reach)
                                   : Point{0.0, 1.0};
    // An S-bend of height 1 peaks at s = (3 -+ sqrt 3) / 6, where 4 s (1 - s)(1 - 2 s) = 0.3849.
    constexpr double k_bend_peak = 0.38490017945975052;
    const Point bow = left * (4.0 * submovement.bow_mm);
    const Point bend = left * (4.0 * submovement.bend_mm / k_bend_peak);
    m_strokes[m_count++] = {submovement.start_s, 1.0 / submovement.duration_s,
                            submovement.by + bow + bend, bow * -1.0 + bend * -3.0, bend * 2.0};
    m_motion_s = std::max(m_motion_s, submovement.start_s + submovement.duration_s);
}

void AimedPath::set_tremor(const Tremor& tremor) noexcept {
    m_tremor = tremor;
    m_trembles = true;
}

Point AimedPath::position_at(double time_s) const noexcept {
    Point at;
    for (std::size_t i = 0; i < m_count; ++i) {
        const Stroke& stroke = m_strokes[i];
        stroke.add_to(at, minimum_jerk((time_s - stroke.start_s) * stroke.rate_per_s));
    }
    if (m_trembles && time_s > 0.0 && time_s < m_motion_s) {
        const double envelope = tremor_envelope(time_s);
        const double angle = 2.0 * std::numbers::pi * m_tremor.frequency_hz * time_s;
        add_tremor(at, envelope * std::cos(angle), envelope * std::sin(angle));
    }
    return at;
}

PathWalk::PathWalk(const AimedPath& path, double from_s, double step_s) noexcept
    : m_path{path}, m_time_s{from_s}, m_step_s{step_s} {
    const double rate = 2.0 * std::numbers::pi * path.m_tremor.frequency_hz;
    m_cosine = std::cos(rate * from_s);
    m_sine = std::sin(rate * from_s);
    m_turn_cosine = std::cos(rate * step_s);
    m_turn_sine = std::sin(rate * step_s);
}

Point AimedPath::end() const noexcept {
    return position_at(m_motion_s);
}

double lawful_time_s(const Person& person, const Form& form, const AimTask& task) noexcept {
    const double difficulty = std::log2(task.distance / task.width + 1.0);
    const double performance = person.index_of_performance.value() * form.performance;
    return (seconds(person.intercept) + difficulty / performance) * form.time;
}

AimedPath aim(const Person& person, const Form& form, const AimTask& task, Random& random) {
    const double distance = task.distance.value();
    const double wildness = draw_wildness(person, form, distance, random);
    const Aims aims = draw_aims(person, wildness, distance, task.width.value(), random);

    const double time = draw_movement_time(person, form, task, random);
    const double dwell =
        std::min(random.log_normal(seconds(person.dwell), person.dwell_spread), 0.45 * time);
    const double motion = std::max(time - dwell, k_shortest_motion_s);

    // Relative schedule first; then the whole is stretched to the motion's time.
    std::array<double, AimedPath::k_max_submovements> begins{};
    std::array<double, AimedPath::k_max_submovements> lasts{};
    double end = 0.0;
    for (std::size_t i = 0; i < aims.count; ++i) {
        lasts[i] = (i == 0 ? 1.0 : k_correction_duration) * random.log_normal(1.0, 0.15);
        begins[i] = i == 0 ? 0.0 : end - k_overlap * lasts[i];
        end = begins[i] + lasts[i];
    }
    const double stretch = motion / end;

    AimedPath path;
    const double direction = task.direction.value() * k_degree;
    Point at;
    for (std::size_t i = 0; i < aims.count; ++i) {
        const Point by = aims.ends[i] - at;
        const double reach = length(by);
        const double bow = draw_bow(person, wildness, reach, random) + person.bow * reach;
        const double bend = 0.4 * draw_bow(person, wildness, reach, random);
        path.add({begins[i] * stretch, lasts[i] * stretch, turned(by, direction), bow, bend});
        at = aims.ends[i];
    }
    path.set_tremor(draw_tremor(person, random));
    path.set_dwell(time > motion ? time - motion : dwell);
    return path;
}

AimedPath wander(const Person& person, const Form& form, std::size_t legs, Millimetres leg_distance,
                 Random& random) {
    const double wildness = draw_wildness(person, form, leg_distance.value(), random);
    AimedPath path;
    double begin = 0.0;
    for (std::size_t i = 0; i < legs; ++i) {
        const double reach = random.log_normal(leg_distance.value(), 0.6);
        const double lasts = random.log_normal(0.55, 0.35) * form.time;
        const double direction = random.uniform(0.0, 2.0 * std::numbers::pi);
        path.add({begin, lasts, turned({reach, 0.0}, direction),
                  draw_bow(person, wildness, reach, random), 0.0});
        begin += lasts * (1.0 - k_overlap);
    }
    path.set_tremor(draw_tremor(person, random));
    return path;
}

} // namespace sagitta::estimator::hand
