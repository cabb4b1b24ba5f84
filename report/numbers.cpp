#include "report/numbers.hpp"

#include <algorithm>
#include <cmath>
#include <fmt/format.h>

namespace sagitta::report {
namespace {

/// Decimals that show two significant digits of `size`, 0 to 4.
int decimals_for(double size, int significant) {
    if (!(size > 0.0) || !std::isfinite(size)) {
        return 2;
    }
    const int magnitude = static_cast<int>(std::floor(std::log10(size)));
    return std::clamp(significant - 1 - magnitude, 0, 4);
}

/// Rounded text; a value that rounds to zero loses its sign.
std::string fixed(double value, int decimals, bool with_sign) {
    const double scale = std::pow(10.0, decimals);
    const double rounded = std::round(value * scale) / scale;
    const double clean = rounded == 0.0 ? 0.0 : rounded;
    return with_sign && clean != 0.0 ? fmt::format("{:+.{}f}", clean, decimals)
                                     : fmt::format("{:.{}f}", clean, decimals);
}

std::string interval_text(const estimator::Interval& interval, bool with_sign) {
    const double half = (interval.high - interval.low) / 2.0;
    const int decimals =
        std::min(half > 0.0 ? decimals_for(half, 2) : decimals_for(interval.estimate, 3), 3);
    return fixed(interval.estimate, decimals, with_sign) + " ± " + fixed(half, decimals, false);
}

} // namespace

std::string grouped(std::uint64_t value) {
    std::string digits = std::to_string(value);
    for (std::size_t place = digits.size(); place > 3;) {
        place -= 3;
        digits.insert(place, " ");
    }
    return digits;
}

std::string count_of(std::uint64_t count, std::string_view noun) {
    const bool es = noun.ends_with("s") || noun.ends_with("sh") || noun.ends_with("ch");
    return grouped(count) + " " + std::string{noun} + (count == 1 ? "" : es ? "es" : "s");
}

std::string with_interval(const estimator::Interval& interval) {
    return interval_text(interval, false);
}

std::string signed_interval(const estimator::Interval& interval) {
    return interval_text(interval, true);
}

std::string signed_within(double value, double width) {
    return fixed(value, std::min(decimals_for(width / 2.0, 2), 3), true);
}

std::string plain(double value) {
    return fixed(value, std::min(decimals_for(std::abs(value), 3), 2), false);
}

std::string share(std::uint64_t part, std::uint64_t whole) {
    if (part == 0 || whole == 0) {
        return "0 %";
    }
    const double percent = 100.0 * static_cast<double>(part) / static_cast<double>(whole);
    if (percent < 0.05) {
        return "< 0.1 %";
    }
    return fixed(percent, percent < 0.95 ? 1 : 0, false) + " %";
}

std::string duration_text(estimator::Micros duration) {
    const auto total = std::chrono::round<std::chrono::seconds>(duration).count();
    if (total < 60) {
        return fmt::format("{} s", total);
    }
    const auto minutes = (total + 30) / 60;
    if (minutes < 60) {
        return fmt::format("{} min", minutes);
    }
    return fmt::format("{} h {} min", minutes / 60, minutes % 60);
}

std::string length_text(estimator::Millimetres length) {
    const double metres = length.value() / 1000.0;
    if (metres >= 1000.0) {
        return fixed(metres / 1000.0, 2, false) + " km";
    }
    return fixed(metres, metres < 10.0 ? 1 : 0, false) + " m";
}

} // namespace sagitta::report
