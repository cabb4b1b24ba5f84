// Physical quantities as types that do not mix by accident. Values are immutable numbers with a
// unit; there is no default value, so a missing number cannot pass for zero.
#pragma once

#include <chrono>
#include <compare>

namespace sagitta::estimator {

using Micros = std::chrono::microseconds;

/// The clock of the kernel's event stamps (CLOCK_MONOTONIC for live pointers). It has no now():
/// the estimator never reads a clock.
struct PointerClock {
    using rep = Micros::rep;
    using period = Micros::period;
    using duration = Micros;
    using time_point = std::chrono::time_point<PointerClock>;
    static constexpr bool is_steady = true;
};
using PointerTime = PointerClock::time_point;
using UtcTime = std::chrono::sys_time<Micros>;

/// What turns a pointer's stamp into UTC: utc = stamp + offset. It changes when the system's
/// clock is set or the machine sleeps, so it belongs to a moment, not to a session.
struct ClockOffset {
    Micros utc_minus_pointer;
    [[nodiscard]] constexpr UtcTime to_utc(PointerTime time) const {
        return UtcTime{time.time_since_epoch() + utc_minus_pointer};
    }
};

template <class Unit>
class Quantity {
public:
    static constexpr Quantity of(double value) noexcept { return Quantity{value}; }
    static constexpr Quantity zero() noexcept { return Quantity{0.0}; }
    [[nodiscard]] constexpr double value() const noexcept { return m_value; }

    friend constexpr auto operator<=>(Quantity, Quantity) noexcept = default;
    friend constexpr Quantity operator+(Quantity a, Quantity b) noexcept {
        return Quantity{a.m_value + b.m_value};
    }
    friend constexpr Quantity operator-(Quantity a, Quantity b) noexcept {
        return Quantity{a.m_value - b.m_value};
    }
    friend constexpr Quantity operator*(Quantity a, double factor) noexcept {
        return Quantity{a.m_value * factor};
    }
    friend constexpr Quantity operator/(Quantity a, double divisor) noexcept {
        return Quantity{a.m_value / divisor};
    }
    friend constexpr double operator/(Quantity a, Quantity b) noexcept {
        return a.m_value / b.m_value;
    }
    constexpr Quantity& operator+=(Quantity other) noexcept {
        m_value += other.m_value;
        return *this;
    }

private:
    explicit constexpr Quantity(double value) noexcept : m_value{value} {}
    double m_value;
};

using Pixels = Quantity<struct PixelsUnit>;                  ///< px, screen plane
using Millimetres = Quantity<struct MillimetresUnit>;        ///< mm, hand plane
using MillimetresPerSecond = Quantity<struct HandSpeedUnit>; ///< mm/s, hand plane
using Degrees = Quantity<struct DegreesUnit>;                ///< deg, counter-clockwise
using Cpi = Quantity<struct CpiUnit>;                        ///< counts per inch
using Bits = Quantity<struct BitsUnit>;                      ///< index of difficulty
using BitsPerSecond = Quantity<struct BitsPerSecondUnit>;    ///< throughput

constexpr double k_mm_per_inch = 25.4; // exact, by the international definition of the inch

[[nodiscard]] constexpr double seconds(Micros duration) noexcept {
    return static_cast<double>(duration.count()) * 1e-6;
}

} // namespace sagitta::estimator
