#include "truth_sums.hpp"

#include "estimator/throughput.hpp"

#include <algorithm>
#include <cmath>

namespace sagitta::bench {
namespace {

using namespace sagitta::estimator;

constexpr double k_least_px = 0.1; // in logarithms and quotients
constexpr double k_effective_width = 4.133;

double difficulty(double distance, double width) {
    return index_of_difficulty(DifficultyForm::shannon, distance / width).value();
}

} // namespace

void Sums::add(const Scores& scores, const std::optional<KnownMovement>& known) {
    add_scores(scores);
    if (known) {
        add_known(scores, *known);
    }
}

void Sums::add_scores(const Scores& scores) {
    const double distance = scores.distance.value();
    const double time = estimator::seconds(scores.movement_time);
    const double error = std::max(scores.error.value(), k_least_px);
    for (std::size_t i = 0; i < bits.size(); ++i) {
        bits[i] += difficulty(distance, k_widths_px[i]);
    }
    bits_by_spread +=
        difficulty(distance, k_effective_width * std::max(scores.variability.value(), k_least_px));
    seconds += time;
    log_distance_time.add(std::log(distance), std::log(time));
    log_distance_error.add(std::log(distance), std::log(error));
    difficulty_time.add(difficulty(distance, k_widths_px[k_width]), time);
    error_share.add(scores.error.value() / distance);
    offset_share.add(scores.offset.value() / distance);
    log_path_ratio.add(std::log(scores.path_ratio()));
    initial_angle_deg.add(scores.initial_angle.value());
    crossings.add(scores.axis_crossings);
    direction_changes.add(scores.direction_changes);
    orthogonal_changes.add(scores.orthogonal_changes);
    submovements.add(scores.submovements);
    primary_fraction.add(scores.primary_fraction);
    sparc.add(scores.smoothness_sparc);
    ldlj.add(scores.smoothness_ldlj);
    peak_speed_mm_s.add(scores.peak_speed.value());
    dwell_s.add(estimator::seconds(scores.dwell));
}

void Sums::add_known(const Scores& scores, const KnownMovement& known) {
    const double time = estimator::seconds(scores.movement_time);
    const double true_bits = difficulty(scores.distance.value(), known.width_px);
    bits_true_width += true_bits;
    seconds_true_width += time;
    true_difficulty_time.add(true_bits, time);

    const double log_distance = std::log(known.distance_px);
    known_bits += difficulty(known.distance_px, known.width_px);
    known_seconds += known.time_s;
    known_log_distance_time.add(log_distance, std::log(known.time_s));
    log_distance_lawful.add(log_distance, std::log(known.lawful_s));
    log_distance_other_lawful.add(log_distance, std::log(known.other_lawful_s));
    lawful_seconds += known.lawful_s;
    other_lawful_seconds += known.other_lawful_s;
}

void Sums::merge(const Sums& other) {
    for (std::size_t i = 0; i < bits.size(); ++i) {
        bits[i] += other.bits[i];
    }
    for (const auto sum : {&Sums::bits_by_spread, &Sums::seconds, &Sums::bits_true_width,
                           &Sums::seconds_true_width, &Sums::known_bits, &Sums::known_seconds,
                           &Sums::lawful_seconds, &Sums::other_lawful_seconds}) {
        this->*sum += other.*sum;
    }
    for (const auto pair :
         {&Sums::log_distance_time, &Sums::log_distance_error, &Sums::difficulty_time,
          &Sums::true_difficulty_time, &Sums::known_log_distance_time, &Sums::log_distance_lawful,
          &Sums::log_distance_other_lawful}) {
        (this->*pair).merge(other.*pair);
    }
    for (const auto one : {&Sums::error_share, &Sums::offset_share, &Sums::log_path_ratio,
                           &Sums::initial_angle_deg, &Sums::crossings, &Sums::direction_changes,
                           &Sums::orthogonal_changes, &Sums::submovements, &Sums::primary_fraction,
                           &Sums::sparc, &Sums::ldlj, &Sums::peak_speed_mm_s, &Sums::dwell_s}) {
        (this->*one).merge(other.*one);
    }
}

Sums merged(std::span<const Sums> days) {
    Sums all;
    for (const Sums& day : days) {
        all.merge(day);
    }
    return all;
}

Slopes Slopes::of(std::span<const Sums> days) {
    const auto pooled = [days](PairMoments Sums::*pair) {
        double xy = 0.0;
        double xx = 0.0;
        for (const Sums& day : days) {
            xy += (day.*pair).m_xy;
            xx += (day.*pair).m2_x;
        }
        return xy / xx;
    };
    return {pooled(&Sums::log_distance_time), pooled(&Sums::log_distance_error),
            pooled(&Sums::known_log_distance_time)};
}

double at_standard_distance(const PairMoments& moments, double slope) {
    return std::exp(moments.mean_y + slope * (std::log(k_standard_distance_px) - moments.mean_x));
}

double slope_of(const PairMoments& moments) {
    return moments.m_xy / moments.m2_x;
}

} // namespace sagitta::bench
