#include "store/recorder.hpp"

#include <algorithm>
#include <string>
#include <utility>

namespace sagitta::store {

using estimator::HourSummary;
using estimator::PointerIndex;
using estimator::PointerTime;

namespace {

HourSummary empty_summary(estimator::Pixels reference_width) {
    HourSummary summary;
    summary.reference_width = reference_width;
    return summary;
}

} // namespace

Recorder::Recorder(Store* store, const RecorderOptions& options)
    : m_store{store}, m_options{options}, m_totals{empty_summary(options.reference_width)} {}

void Recorder::set_pointer(PointerIndex index, PointerId id) {
    m_ids[static_cast<std::size_t>(index)] = id;
}

void Recorder::set_condition(ConditionId condition) {
    m_condition = condition;
}

void Recorder::set_clock(estimator::ClockOffset offset) {
    m_clock = offset;
}

void Recorder::add_event(StoredEvent event) {
    if (m_store) {
        m_batch.events.push_back(std::move(event));
    }
}

void Recorder::renumber(const std::map<PointerId, PointerId>& pointers,
                        const std::map<ConditionId, ConditionId>& conditions) {
    const auto take_new = [](const auto& numbers, auto& id) {
        if (const auto found = numbers.find(id); found != numbers.end()) {
            id = found->second;
        }
    };
    for (StoredMovement& movement : m_batch.movements) {
        take_new(pointers, movement.pointer);
        take_new(conditions, movement.condition);
    }
    for (StoredEvent& event : m_batch.events) {
        if (event.pointer) {
            take_new(pointers, *event.pointer);
        }
    }
    std::map<HourKey, HourSummary> hours;
    for (auto& [key, summary] : m_hours) {
        auto [start, pointer, condition] = key;
        take_new(pointers, pointer);
        take_new(conditions, condition);
        hours.emplace(HourKey{start, pointer, condition}, std::move(summary));
    }
    m_hours = std::move(hours);
    for (PointerId& id : m_ids) {
        take_new(pointers, id);
    }
    take_new(conditions, m_condition);
}

HourSummary& Recorder::hour(PointerIndex pointer, PointerTime time) {
    const auto start = std::chrono::floor<std::chrono::hours>(m_clock.to_utc(time));
    const HourKey key{start, m_ids[static_cast<std::size_t>(pointer)], m_condition};
    return m_hours.try_emplace(key, empty_summary(m_options.reference_width)).first->second;
}

void Recorder::keep(const estimator::Movement& movement) {
    if (m_batch.movements.size() >= m_options.max_waiting_movements) {
        const auto surplus = static_cast<std::ptrdiff_t>(
            std::min(m_options.batch_movements, m_batch.movements.size()));
        m_batch.movements.erase(m_batch.movements.begin(), m_batch.movements.begin() + surplus);
        m_given_up += static_cast<std::uint64_t>(surplus);
    }
    m_batch.movements.push_back({.start = m_clock.to_utc(movement.start),
                                 .press = m_clock.to_utc(movement.press),
                                 .pointer = m_ids[static_cast<std::size_t>(movement.pointer)],
                                 .condition = m_condition,
                                 .kind = movement.kind,
                                 .button = movement.button,
                                 .scores = movement.scores});
}

void Recorder::on_movement(const estimator::Movement& movement) {
    m_totals.add(movement);
    if (!m_store) {
        return;
    }
    hour(movement.pointer, movement.press).add(movement);
    ++m_since_flush;
    if (m_options.keep_movements) {
        keep(movement);
    }
}

void Recorder::on_exposure(const estimator::Exposure& exposure) {
    m_totals.add(exposure);
    if (m_store) {
        hour(exposure.pointer, exposure.time).add(exposure);
    }
}

void Recorder::on_press(PointerIndex pointer, PointerTime time, estimator::Button) {
    ++m_totals.presses;
    if (m_store) {
        ++hour(pointer, time).presses;
    }
}

void Recorder::on_wheel(PointerIndex pointer, PointerTime time, std::uint32_t steps_120ths) {
    m_totals.wheel_120ths += steps_120ths;
    if (m_store) {
        hour(pointer, time).wheel_120ths += steps_120ths;
    }
}

bool Recorder::full() const {
    return m_since_flush >= m_options.batch_movements;
}

bool Recorder::empty() const {
    return m_batch.empty() && m_hours.empty();
}

Result<void> Recorder::flush() {
    m_since_flush = 0;
    if (!m_store || empty()) {
        return {};
    }
    if (m_given_up > m_given_up_recorded && !m_batch.movements.empty()) {
        m_batch.events.push_back({m_batch.movements.front().press, EventKind::lost_reports,
                                  std::nullopt,
                                  std::to_string(m_given_up - m_given_up_recorded) +
                                      " single movements given up while the store could not be "
                                      "written; their hours count them"});
        m_given_up_recorded = m_given_up;
    }
    for (const auto& [key, summary] : m_hours) {
        const auto& [start, pointer, condition] = key;
        m_batch.hours.push_back({start, pointer, condition, summary});
    }
    auto written = m_store->append(m_batch);
    m_batch.hours.clear();
    if (written) {
        discard();
    }
    return written;
}

void Recorder::discard() {
    m_batch.movements.clear();
    m_batch.events.clear();
    m_hours.clear();
}

} // namespace sagitta::store
