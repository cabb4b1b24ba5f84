// What bench_truth keeps of a day: sums of what was scored, and of what is known of the same
// movements.
#pragma once

#include "estimator/moments.hpp"
#include "estimator/movement.hpp"

#include <array>
#include <optional>
#include <span>

namespace sagitta::bench {

constexpr double k_standard_distance_px = 200.0;
/// W/2, W and 2W of implied throughput.
constexpr std::array<double, 3> k_widths_px{10.0, 20.0, 40.0};
constexpr std::size_t k_width = 1;

/// The truth of one aimed movement.
struct KnownMovement {
    double distance_px;
    double width_px;
    double time_s;         ///< from the first motion to the press
    double lawful_s;       ///< mean of the law for this target
    double other_lawful_s; ///< the same on the device that this one is compared with
};

/// Mergeable.
struct Sums {
    // Scored clicks.
    std::array<double, 3> bits{};
    double bits_by_spread = 0.0; ///< with 4.133 MV in place of W
    double seconds = 0.0;
    estimator::PairMoments log_distance_time;  ///< ln px, ln s
    estimator::PairMoments log_distance_error; ///< ln px, ln px of ME
    estimator::PairMoments difficulty_time;    ///< bit at W, s
    estimator::Moments error_share, offset_share, log_path_ratio, initial_angle_deg;
    estimator::Moments crossings, direction_changes, orthogonal_changes;
    estimator::Moments submovements, primary_fraction, sparc, ldlj;
    estimator::Moments peak_speed_mm_s, dwell_s;

    // Those of them whose target is known: as scored, but with the target's own width.
    double bits_true_width = 0.0;
    double seconds_true_width = 0.0;
    estimator::PairMoments true_difficulty_time;

    // The same movements as they were made.
    double known_bits = 0.0;
    double known_seconds = 0.0;
    estimator::PairMoments known_log_distance_time;
    estimator::PairMoments log_distance_lawful;
    estimator::PairMoments log_distance_other_lawful;
    double lawful_seconds = 0.0;
    double other_lawful_seconds = 0.0;

    void add(const estimator::Scores& scores, const std::optional<KnownMovement>& known);
    void merge(const Sums& other);

private:
    void add_scores(const estimator::Scores& scores);
    void add_known(const estimator::Scores& scores, const KnownMovement& known);
};

[[nodiscard]] Sums merged(std::span<const Sums> days);

/// Slopes common to all days, by which a day's mean is moved to the standard distance.
struct Slopes {
    double time, error, known_time;
    [[nodiscard]] static Slopes of(std::span<const Sums> days);
};

/// Geometric mean of y at the standard distance, along `slope`.
[[nodiscard]] double at_standard_distance(const estimator::PairMoments& moments, double slope);
[[nodiscard]] double slope_of(const estimator::PairMoments& moments);

} // namespace sagitta::bench
