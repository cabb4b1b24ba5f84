#include "truth_measures.hpp"

#include <array>
#include <cmath>

namespace sagitta::bench {
namespace {

using estimator::hand::Person;

double known_throughput(const Sums& sums, const Slopes&, const Person&) {
    return sums.known_bits / sums.known_seconds;
}

double known_performance(const Sums&, const Slopes&, const Person& person) {
    return person.index_of_performance.value();
}

double known_time(const Sums& sums, const Slopes& slopes, const Person&) {
    return at_standard_distance(sums.known_log_distance_time, slopes.known_time);
}

Measure throughput_at(const char* name, std::size_t width) {
    return {name,
            Known::speed,
            1,
            1,
            [width](const Sums& s, const Slopes&) { return s.bits.at(width) / s.seconds; },
            known_throughput,
            KnownChange::throughput,
            true};
}

Measure mean_of(const char* name, Known claim, int claim_sign, int speed_sign,
                estimator::Moments Sums::*moments) {
    return {name,
            claim,
            claim_sign,
            speed_sign,
            [moments](const Sums& s, const Slopes&) { return (s.*moments).mean; },
            {}};
}

Measure compared(Measure measure, KnownChange change = KnownChange::none) {
    measure.change = change;
    measure.compared = true;
    return measure;
}

std::vector<Measure> speed_measures() {
    return {
        throughput_at("implied throughput, W = 20 px", k_width),
        throughput_at("  at W/2 = 10 px", 0),
        throughput_at("  at 2 W = 40 px", 2),
        {"throughput, true widths", Known::speed, 1, 1,
         [](const Sums& s, const Slopes&) { return s.bits_true_width / s.seconds_true_width; },
         known_throughput, KnownChange::throughput, true},
        {"throughput, 4.133 MV for W", Known::speed, 1, 1,
         [](const Sums& s, const Slopes&) { return s.bits_by_spread / s.seconds; },
         known_throughput, KnownChange::throughput, true},
        {"slope form 1/b, W = 20 px", Known::speed, 1, 1,
         [](const Sums& s, const Slopes&) { return 1.0 / slope_of(s.difficulty_time); },
         known_performance, KnownChange::slope, true},
        {"slope form 1/b, true widths", Known::speed, 1, 1,
         [](const Sums& s, const Slopes&) { return 1.0 / slope_of(s.true_difficulty_time); },
         known_performance, KnownChange::slope, true},
        {"movement time at 200 px", Known::speed, -1, -1,
         [](const Sums& s, const Slopes& slopes) {
             return at_standard_distance(s.log_distance_time, slopes.time);
         },
         known_time, KnownChange::time, true},
        compared(mean_of("peak speed", Known::speed, 1, 1, &Sums::peak_speed_mm_s)),
    };
}

std::vector<Measure> path_measures() {
    return {
        {"ME at 200 px",
         Known::noise,
         1,
         -1,
         [](const Sums& s, const Slopes& slopes) {
             return at_standard_distance(s.log_distance_error, slopes.error);
         },
         {},
         KnownChange::noise,
         true},
        compared(mean_of("ME/D, mean", Known::noise, 1, -1, &Sums::error_share)),
        {"path ratio, geometric mean",
         Known::noise,
         1,
         -1,
         [](const Sums& s, const Slopes&) { return std::exp(s.log_path_ratio.mean); },
         {},
         KnownChange::none,
         true},
        mean_of("TAC", Known::noise, 1, -1, &Sums::crossings),
        compared(mean_of("MDC", Known::noise, 1, -1, &Sums::direction_changes)),
        mean_of("ODC", Known::noise, 1, -1, &Sums::orthogonal_changes),
        mean_of("MO/D, mean", Known::bow, 1, -1, &Sums::offset_share),
        mean_of("initial angle, mean", Known::bow, 1, -1, &Sums::initial_angle_deg),
        compared(mean_of("submovements", Known::detours, 1, -1, &Sums::submovements)),
        mean_of("primary fraction", Known::detours, -1, 1, &Sums::primary_fraction),
        mean_of("SPARC", Known::detours, -1, 1, &Sums::sparc),
        mean_of("LDLJ", Known::detours, -1, 1, &Sums::ldlj),
        mean_of("dwell", Known::dwell, 1, -1, &Sums::dwell_s),
    };
}

} // namespace

const char* to_text(Known known) {
    constexpr std::array<const char*, k_known> names{"speed", "intercept", "dwell",  "noise",
                                                     "bow",   "detours",   "misses", "tremor"};
    return names.at(static_cast<std::size_t>(known));
}

double truth_of(Known known, const Person& person, const estimator::hand::Form& effect) {
    switch (known) {
    case Known::speed:
        return person.index_of_performance.value() * effect.performance;
    case Known::intercept:
        return estimator::seconds(person.intercept);
    case Known::dwell:
        return estimator::seconds(person.dwell);
    case Known::noise:
        return person.lateral_noise * effect.lateral;
    case Known::bow:
        return person.bow;
    case Known::detours:
        return person.detour_share;
    case Known::misses:
        return person.primary_spread;
    case Known::tremor:
        return person.tremor_amplitude.value();
    }
    return 0.0;
}

std::vector<double> Measure::by_day(std::span<const Sums> days) const {
    const Slopes slopes = Slopes::of(days);
    std::vector<double> values;
    values.reserve(days.size());
    for (const Sums& day : days) {
        values.push_back(value(day, slopes));
    }
    return values;
}

const std::vector<Measure>& measures() {
    static const std::vector<Measure> all = [] {
        std::vector<Measure> list = speed_measures();
        const std::vector<Measure> path = path_measures();
        list.insert(list.end(), path.begin(), path.end());
        return list;
    }();
    return all;
}

} // namespace sagitta::bench
