#include "estimator/submovements.hpp"

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <limits>
#include <optional>

namespace sagitta::estimator {
namespace {

constexpr double k_prominence = 0.05; ///< of the peak of |velocity|

/// Vertex of the parabola through three equally spaced values, as an offset from the middle one.
double vertex(double left, double middle, double right) {
    const double bend = left - 2.0 * middle + right;
    return bend == 0.0 ? 0.0 : std::clamp(0.5 * (left - right) / bend, -0.5, 0.5);
}

/// What was found in one stretch of falling speed.
struct Inflections {
    std::size_t count = 0;
    std::size_t first = 0; ///< its interval between samples, first to come in time
};

class Profile {
public:
    Profile(std::span<const double> velocity, double least_prominence)
        : m_velocity{velocity}, m_prominence{least_prominence} {
        for (std::size_t i = 0; i < velocity.size(); ++i) {
            m_prominence = std::max(m_prominence, k_prominence * speed(i));
        }
    }

    [[nodiscard]] std::size_t size() const { return m_velocity.size(); }
    [[nodiscard]] double prominence() const { return m_prominence; }
    [[nodiscard]] bool is_forward(std::size_t i) const { return m_velocity[i] > 0.0; }
    [[nodiscard]] double speed(std::size_t i) const { return std::abs(m_velocity[i]); }

    /// Where |velocity| is lowest around sample `valley`: criterion (1) when the velocity changes
    /// its sign there, else (2).
    [[nodiscard]] double turn_at(std::size_t valley) const {
        if (valley > 0 && m_velocity[valley - 1] * m_velocity[valley] < 0.0) {
            return zero_after(valley - 1);
        }
        if (valley + 1 < size() && m_velocity[valley] * m_velocity[valley + 1] < 0.0) {
            return zero_after(valley);
        }
        const double middle = static_cast<double>(valley);
        if (valley == 0 || valley + 1 == size()) {
            return middle;
        }
        return middle + vertex(speed(valley - 1), speed(valley), speed(valley + 1));
    }

    /// Criterion (3) within the fall from sample `peak` to sample `end`.
    [[nodiscard]] Inflections inflections(std::size_t peak, std::size_t end) const;

    /// Where the inflection around interval `greatest` begins a piece: where the acceleration
    /// crosses 0 when it does so, else where it is greatest.
    [[nodiscard]] double inflection_at(std::size_t greatest) const {
        std::size_t k = greatest;
        if (change(k) > 0.0) {
            while (change(k - 1) > 0.0) {
                --k;
            }
            const double before = change(k - 1);
            return static_cast<double>(k) - 0.5 + before / (before - change(k));
        }
        return static_cast<double>(k) + 0.5 + vertex(change(k - 1), change(k), change(k + 1));
    }

private:
    [[nodiscard]] double zero_after(std::size_t i) const {
        return static_cast<double>(i) + m_velocity[i] / (m_velocity[i] - m_velocity[i + 1]);
    }
    /// Change of |velocity| from sample k to k + 1.
    [[nodiscard]] double change(std::size_t k) const { return speed(k + 1) - speed(k); }

    [[nodiscard]] double area_above(double base, std::size_t begin, std::size_t end) const {
        double area = 0.0;
        for (std::size_t k = begin; k < end; ++k) {
            area += change(k) - base;
        }
        return area;
    }
    [[nodiscard]] Inflections split(std::size_t begin, std::size_t end, double floor) const;

    std::span<const double> m_velocity;
    double m_prominence;
};

/// Inflections among the intervals [begin, end), which together stand out: two parts count apart
/// when each stands out above the interval between them.
/// @param floor  speed that must be reached at or after an inflection
Inflections Profile::split(std::size_t begin, std::size_t end, double floor) const {
    for (;;) {
        std::size_t lowest = begin;
        std::size_t greatest = begin;
        for (std::size_t k = begin + 1; k < end; ++k) {
            lowest = change(k) < change(lowest) ? k : lowest;
            greatest = change(k) > change(greatest) ? k : greatest;
        }
        const double base = change(lowest);
        const bool left = area_above(base, begin, lowest) >= m_prominence;
        const bool right = area_above(base, lowest + 1, end) >= m_prominence;
        if (left && right) {
            const Inflections earlier = split(begin, lowest, floor);
            return {earlier.count + split(lowest + 1, end, floor).count, earlier.first};
        }
        if (!left && !right) {
            double top = speed(greatest);
            for (std::size_t i = greatest + 1; i <= end; ++i) {
                top = std::max(top, speed(i));
            }
            return {top >= floor ? 1U : 0U, greatest};
        }
        begin = left ? begin : lowest + 1;
        end = left ? lowest : end;
    }
}

Inflections Profile::inflections(std::size_t peak, std::size_t end) const {
    // The steepest interval parts the fall. On either side, going towards it, each interval that is
    // steeper than all before closes a bump of gentler ones, whose shallower flank is the steepest
    // so far.
    const double floor = speed(end) + m_prominence;
    std::size_t steepest = peak;
    for (std::size_t k = peak + 1; k < end; ++k) {
        steepest = change(k) < change(steepest) ? k : steepest;
    }
    Inflections before;
    std::size_t record = peak;
    double area = 0.0;
    for (std::size_t k = peak + 1; k <= steepest; ++k) {
        if (change(k) > change(record)) {
            area += change(k) - change(record);
            continue;
        }
        if (area >= m_prominence) {
            const Inflections bump = split(record + 1, k, floor);
            before.first = before.count == 0 ? bump.first : before.first;
            before.count += bump.count;
        }
        record = k;
        area = 0.0;
    }
    Inflections after;
    record = end - 1;
    area = 0.0;
    for (std::size_t k = end - 1; k-- > steepest;) {
        if (change(k) > change(record)) {
            area += change(k) - change(record);
            continue;
        }
        if (area >= m_prominence) {
            const Inflections bump = split(k + 1, record, floor);
            after.first = bump.count > 0 ? bump.first : after.first;
            after.count += bump.count;
        }
        record = k;
        area = 0.0;
    }
    return {before.count + after.count, before.count > 0 ? before.first : after.first};
}

/// Adds the pieces of one rise and fall of the speed, as they come in time.
class Counter {
public:
    explicit Counter(const Profile& profile) : m_profile{profile} {}

    /// @param peak   sample of the highest speed;  @param end  last sample of the fall
    /// @param is_followed  whether another piece rises after `end`
    void add_piece(std::size_t peak, std::size_t end, bool is_followed) {
        const Inflections inflections =
            end > peak ? m_profile.inflections(peak, end) : Inflections{};
        m_count += 1 + inflections.count;
        if (m_primary_end || !m_profile.is_forward(peak)) {
            return;
        }
        if (inflections.count > 0) {
            m_primary_end = m_profile.inflection_at(inflections.first);
        } else if (is_followed) {
            m_primary_end = m_profile.turn_at(end);
        }
    }

    [[nodiscard]] Submovements result() const {
        constexpr std::size_t most = std::numeric_limits<std::uint16_t>::max();
        return {static_cast<std::uint16_t>(std::min(m_count, most)),
                m_primary_end.value_or(static_cast<double>(m_profile.size() - 1))};
    }

private:
    const Profile& m_profile;
    std::size_t m_count = 0;
    std::optional<double> m_primary_end;
};

} // namespace

Submovements find_submovements(std::span<const double> along_velocity,
                               double least_prominence) noexcept {
    const Profile profile{along_velocity, least_prominence};
    if (!(profile.prominence() > 0.0)) {
        return {1, static_cast<double>(profile.size() - 1)};
    }
    Counter counter{profile};
    bool is_rising = true;
    std::size_t peak = 0;
    std::size_t valley = 0;
    for (std::size_t i = 1; i < profile.size(); ++i) {
        const double speed = profile.speed(i);
        if (is_rising) {
            peak = speed > profile.speed(peak) ? i : peak;
            if (profile.speed(peak) - speed >= profile.prominence()) {
                is_rising = false;
                valley = i;
            }
        } else {
            valley = speed < profile.speed(valley) ? i : valley;
            if (speed - profile.speed(valley) >= profile.prominence()) {
                counter.add_piece(peak, valley, true);
                is_rising = true;
                peak = i;
            }
        }
    }
    counter.add_piece(peak, profile.size() - 1, false);
    return counter.result();
}

} // namespace sagitta::estimator
