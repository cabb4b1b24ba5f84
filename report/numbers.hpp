// Numbers as people read them: digits that the uncertainty warrants, units, counts in sentences.
#pragma once

#include "estimator/interval.hpp"
#include "estimator/units.hpp"

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>

namespace sagitta::report {

/// "4 812": digits in groups of three.
[[nodiscard]] std::string grouped(std::uint64_t value);
/// "1 day", "5 days"; "1 pointer", "2 pointers".
[[nodiscard]] std::string count_of(std::uint64_t count, std::string_view noun);
/// "3.15 ± 0.12": the half width has two significant digits, at most three decimals,
/// and the estimate as many.
[[nodiscard]] std::string with_interval(const estimator::Interval& interval);
/// The same with a sign, "+0.05 ± 0.13": for differences.
[[nodiscard]] std::string signed_interval(const estimator::Interval& interval);
/// "+0.05": a value with a sign and as many decimals as an interval of this width warrants.
[[nodiscard]] std::string signed_within(double value, double width);
/// A mean without an interval: three significant digits, at most two decimals.
[[nodiscard]] std::string plain(double value);
/// "59 %", "0.4 %" below one; "0 %" for none.
[[nodiscard]] std::string share(std::uint64_t part, std::uint64_t whole);
/// "3 h 12 min", "12 min", "40 s".
[[nodiscard]] std::string duration_text(estimator::Micros duration);
/// "1.24 km", "318 m", "4.2 m".
[[nodiscard]] std::string length_text(estimator::Millimetres length);

} // namespace sagitta::report
