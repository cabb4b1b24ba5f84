// The measures that bench_truth holds against the truth, as figures of a set of days.
#pragma once

#include "estimator/hand/person.hpp"
#include "truth_sums.hpp"

#include <functional>
#include <span>
#include <vector>

namespace sagitta::bench {

/// What is known of a person.
enum class Known {
    speed,     ///< index of performance, bit/s
    intercept, ///< of the movement-time law, s
    dwell,     ///< median still time before the press, s
    noise,     ///< lateral noise, share of the distance
    bow,       ///< systematic bow, share of the distance
    detours,   ///< share of movements that are redirected in flight
    misses,    ///< spread of the primary submovement's end, share of the distance
    tremor     ///< amplitude, mm
};
constexpr std::size_t k_known = 8;
[[nodiscard]] const char* to_text(Known known);
/// @param effect  of the device
[[nodiscard]] double truth_of(Known known, const estimator::hand::Person& person,
                              const estimator::hand::Form& effect);

/// What is known of how a measure differs between two devices.
enum class KnownChange { none, throughput, slope, time, noise };

struct Measure {
    const char* name;
    Known claim;    ///< what it is meant to follow
    int claim_sign; ///< +1: it grows with what it claims
    int speed_sign; ///< +1: it should be higher in faster people, were it to stand in for speed
    std::function<double(const Sums&, const Slopes&)> value;
    /// Truth in the same unit; empty when there is none.
    std::function<double(const Sums&, const Slopes&, const estimator::hand::Person&)> known;
    KnownChange change = KnownChange::none;
    bool compared = false; ///< shown in the comparison of two devices

    [[nodiscard]] double of(std::span<const Sums> days) const {
        return value(merged(days), Slopes::of(days));
    }
    /// Day by day, each moved to the standard distance along the slopes common to them.
    [[nodiscard]] std::vector<double> by_day(std::span<const Sums> days) const;
};

[[nodiscard]] const std::vector<Measure>& measures();
/// Place of implied throughput at the reference width.
constexpr std::size_t k_headline = 0;

} // namespace sagitta::bench
