#include "report/first_look.hpp"

#include "report/numbers.hpp"
#include "report/session.hpp"
#include "report/table.hpp"

#include <fmt/format.h>

namespace sagitta::report {

void FirstLookBuilder::add(const store::StoredHour& hour) {
    Sums& sums = m_days[hour.pointer][m_calendar->day_of(hour.start)];
    sums.clicks += hour.summary.clicks;
    sums.movement_time += hour.summary.movement_time;
    for (std::size_t i = 0; i < sums.bits.size(); ++i) {
        sums.bits[i] += hour.summary.difficulty_bits[i];
    }
    m_width = hour.summary.reference_width;
}

FirstLook FirstLookBuilder::build(const std::vector<store::StoredPointer>& pointers) const {
    FirstLook look;
    look.reference_width = m_width;
    look.confidence = m_confidence;
    for (const store::StoredPointer& pointer : pointers) {
        PointerDays days{pointer};
        const auto found = m_days.find(pointer.id);
        for (std::size_t i = 0; i < days.throughput.size(); ++i) {
            std::vector<double> values;
            if (found != m_days.end()) {
                for (const auto& [day, sums] : found->second) {
                    if (sums.clicks >= k_min_day_clicks &&
                        sums.movement_time > estimator::Micros{0}) {
                        values.push_back(sums.bits.at(i) / estimator::seconds(sums.movement_time));
                    }
                }
            }
            days.throughput.at(i) = mean_over_days(std::move(values), m_confidence);
        }
        if (found != m_days.end()) {
            for (const auto& [day, sums] : found->second) {
                days.clicks += sums.clicks;
            }
        }
        look.pointers.push_back(std::move(days));
    }
    if (look.pointers.size() != 2) {
        return look;
    }
    for (std::size_t i = 0; i < look.difference.size(); ++i) {
        const DayMean& first = look.pointers[0].throughput.at(i);
        const DayMean& second = look.pointers[1].throughput.at(i);
        if (first.interval && second.interval) {
            if (auto difference =
                    estimator::difference_interval(second.values, first.values, m_confidence)) {
                look.difference.at(i) = *difference;
            }
        }
    }
    return look;
}

std::string first_look_text(const FirstLook& look, const Session& session) {
    constexpr std::array<double, 3> k_width_shares = {0.5, 1.0, 2.0};
    std::string text =
        session.style.heading("A first look at the pointers: implied throughput, bit/s") + "\n";
    std::vector<Table::Column> columns = {
        {"", Align::left}, {"days", Align::right}, {"scored clicks", Align::right}};
    for (const double share : k_width_shares) {
        columns.push_back(
            {fmt::format("W {} px", share * look.reference_width.value()), Align::right});
    }
    Table table{columns};
    for (const PointerDays& one : look.pointers) {
        std::vector<std::string> cells = {shortened(pointer_title(one.pointer), 40),
                                          std::to_string(one.throughput[1].values.size()),
                                          grouped(one.clicks)};
        for (const DayMean& mean : one.throughput) {
            cells.push_back(mean.interval ? with_interval(*mean.interval)
                            : mean.mean   ? plain(*mean.mean)
                                          : "-");
        }
        table.add(std::move(cells));
    }
    if (look.difference[1]) {
        std::vector<std::string> cells = {"second less first", "", ""};
        for (const auto& difference : look.difference) {
            cells.push_back(difference ? signed_interval(*difference) : "");
        }
        table.add(std::move(cells));
    }
    text += table.text();
    if (!look.difference[1]) {
        return text + wrapped("There are too few days for a difference with an interval.");
    }
    const estimator::Interval& difference = *look.difference[1];
    const std::string second = pointer_title(look.pointers[1].pointer);
    const char* so_far = difference.low > 0.0    ? "is higher than"
                         : difference.high < 0.0 ? "is lower than"
                                                 : "does not differ clearly from";
    return text + wrapped(fmt::format(
                      "So far the throughput of {} {} that of {}. This is a first look, not a "
                      "verdict: days are compared as they came, without allowing for "
                      "distances, directions, practice or how often one looks.",
                      second, so_far, pointer_title(look.pointers[0].pointer)));
}

} // namespace sagitta::report
