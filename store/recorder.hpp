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
};

/// Sink of a pipeline. It keeps the totals of all it has seen, writes only in flush(), and keeps
/// an unwritten batch when writing fails, so that a later flush can try again.
class Recorder final : public estimator::MovementSink {
public:
    /// @param store  outlives the recorder; null: count only
    Recorder(Store* store, const RecorderOptions& options);

    /// Must precede the pointer's first call.
    void set_pointer(estimator::PointerIndex index, PointerId id);
    void set_condition(ConditionId condition);
    /// The offset for all that follows.
    void set_clock(estimator::ClockOffset offset);
    void add_event(StoredEvent event);

    void on_movement(const estimator::Movement& movement) override;
    void on_exposure(const estimator::Exposure& exposure) override;
    void on_press(estimator::PointerIndex pointer, estimator::PointerTime time,
                  estimator::Button button) override;
    void on_wheel(estimator::PointerIndex pointer, estimator::PointerTime time,
                  std::uint32_t steps_120ths) override;

    /// The batch is as large as `batch_movements`: time to flush.
    [[nodiscard]] bool full() const;
    [[nodiscard]] bool empty() const;
    /// Writes the batch, whatever its size. @return Store::append's errors; the batch is kept
    [[nodiscard]] Result<void> flush();
    /// Everything seen since the start, over all pointers.
    [[nodiscard]] const estimator::HourSummary& totals() const { return m_totals; }

private:
    using HourKey = std::tuple<UtcTime, PointerId, ConditionId>;
    estimator::HourSummary& hour(estimator::PointerIndex pointer, estimator::PointerTime time);

    Store* m_store;
    RecorderOptions m_options;
    estimator::ClockOffset m_clock{};
    std::array<PointerId, estimator::k_max_pointers> m_ids{};
    ConditionId m_condition = k_unlabelled;
    Batch m_batch;
    std::map<HourKey, estimator::HourSummary> m_hours;
    estimator::HourSummary m_totals;
};

} // namespace sagitta::store
