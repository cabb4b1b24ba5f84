// Collects what a pipeline finds into batches and writes them: the last step of live recording,
// replay and demo alike.
#pragma once

#include "estimator/pipeline.hpp"
#include "store/store.hpp"

#include <array>
#include <map>
#include <optional>
#include <tuple>

namespace sagitta::store {

struct RecorderOptions {
    std::size_t batch_movements = 256;
    estimator::Pixels reference_width = estimator::Pixels::of(20.0);
    bool keep_movements = true; ///< false: `detail: hours`
    /// Single movements that wait in memory at most while the store cannot be written. Beyond
    /// that the oldest are given up; they still count in their hours.
    std::size_t max_waiting_movements = 8192;
};

/// Sink of a pipeline. It keeps the totals of all it has seen, writes only in flush(), and keeps
/// an unwritten batch when writing fails, so that a later flush can try again.
class Recorder final : public estimator::MovementSink {
public:
    /// @param store  outlives the recorder; null: count only
    Recorder(Store* store, const RecorderOptions& options);

    /// Must precede the pointer's first call.
    void set_pointer(estimator::PointerIndex index, PointerId id);
    /// The condition of all that follows.
    void set_condition(ConditionId condition);
    /// The offset for all that follows.
    void set_clock(estimator::ClockOffset offset);
    void add_event(StoredEvent event);
    /// The store became a fresh one (Store::reopen): what waits and what follows takes its
    /// numbers. Numbers that are not named stay.
    void renumber(const std::map<PointerId, PointerId>& pointers,
                  const std::map<ConditionId, ConditionId>& conditions);

    void on_movement(const estimator::Movement& movement) override;
    void on_exposure(const estimator::Exposure& exposure) override;
    void on_press(estimator::PointerIndex pointer, estimator::PointerTime time,
                  estimator::Button button) override;
    void on_wheel(estimator::PointerIndex pointer, estimator::PointerTime time,
                  std::uint32_t steps_120ths) override;

    /// The batch has grown by `batch_movements` since the last flush, done or failed: time to
    /// flush.
    [[nodiscard]] bool full() const;
    [[nodiscard]] bool empty() const;
    /// Writes the batch, whatever its size. @return Store::append's errors; the batch is kept
    [[nodiscard]] Result<void> flush();
    /// Drops the batch, for one that the store will never take (ErrorCode::already_there).
    void discard();
    /// Everything seen since the start, over all pointers.
    [[nodiscard]] const estimator::HourSummary& totals() const { return m_totals; }
    /// Single movements given up since the start because the store could not be written.
    [[nodiscard]] std::uint64_t given_up() const { return m_given_up; }

private:
    using HourKey = std::tuple<UtcTime, PointerId, ConditionId>;
    estimator::HourSummary& hour(estimator::PointerIndex pointer, estimator::PointerTime time);
    void keep(const estimator::Movement& movement);

    Store* m_store;
    RecorderOptions m_options;
    estimator::ClockOffset m_clock{};
    std::array<PointerId, estimator::k_max_pointers> m_ids{};
    ConditionId m_condition = k_unlabelled;
    Batch m_batch; ///< its hours stay empty until they are written
    std::map<HourKey, estimator::HourSummary> m_hours;
    std::size_t m_since_flush = 0;
    std::uint64_t m_given_up = 0;
    std::uint64_t m_given_up_recorded = 0; ///< of these, how many an event tells of
    estimator::HourSummary m_totals;
};

} // namespace sagitta::store
