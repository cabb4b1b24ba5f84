// A first look at two pointers: daily throughput side by side, without a verdict. Pure.
#pragma once

#include "report/session.hpp"
#include "report/week_summary.hpp"

namespace sagitta::report {

/// One pointer over all days of a store.
struct PointerDays {
    store::StoredPointer pointer;
    std::uint64_t clicks = 0;            ///< scored
    std::array<DayMean, 3> throughput{}; ///< bit/s at W/2, W and 2 W
};

struct FirstLook {
    std::vector<PointerDays> pointers; ///< in the order of the store
    /// Second pointer less the first at W/2, W and 2 W; nothing with too few days.
    std::array<std::optional<estimator::Interval>, 3> difference{};
    estimator::Pixels reference_width = estimator::Pixels::of(20.0);
    double confidence = 0.95;
};

/// Gathers daily sums from hours.
class FirstLookBuilder {
public:
    /// @param calendar  outlives the builder
    FirstLookBuilder(const Calendar& calendar, double confidence)
        : m_calendar{&calendar}, m_confidence{confidence} {}
    /// Precondition: all hours have one reference width.
    void add(const store::StoredHour& hour);
    /// @param pointers  the two to look at, or more: then no difference is given
    [[nodiscard]] FirstLook build(const std::vector<store::StoredPointer>& pointers) const;

private:
    struct Sums {
        std::uint64_t clicks = 0;
        estimator::Micros movement_time{};
        std::array<double, 3> bits{};
    };
    const Calendar* m_calendar;
    double m_confidence;
    estimator::Pixels m_width = estimator::Pixels::of(20.0);
    std::map<store::PointerId, std::map<Day, Sums>> m_days;
};

[[nodiscard]] std::string first_look_text(const FirstLook& look, const Session& session);

} // namespace sagitta::report
