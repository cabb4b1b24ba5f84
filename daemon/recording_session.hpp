// One recording: reports from a feed, through the pipeline, into the store; with the gaps marked.
// It owns no loop and no timer: its owner calls turn() when reports wait and flush_in_time() when a
// batch is due. One thread.
#pragma once

#include "config/settings.hpp"
#include "daemon/clock_watch.hpp"
#include "daemon/control_protocol.hpp"
#include "daemon/pointer_feed.hpp"
#include "estimator/pipeline.hpp"
#include "store/recorder.hpp"

#include <array>
#include <bitset>
#include <filesystem>
#include <map>
#include <optional>
#include <spdlog/logger.h>
#include <string>

namespace sagitta::daemon {

/// While the store cannot be written, this many events are kept beside the recorder's movements;
/// an event of its own then tells how many more there were.
constexpr std::size_t k_most_waiting_events = 1000;

class RecordingSession final : public ControlTarget {
public:
    /// What a session works with; all outlive it.
    struct Parts {
        PointerFeed& feed;
        Clocks& clocks;
        store::Store& store;
        spdlog::logger& log;
    };
    RecordingSession(config::Settings settings, const Parts& parts, std::string version);
    ~RecordingSession() override;

    /// Takes up the condition and the pause that the last session left, marks the start, and looks
    /// for pointers.
    /// @param set_aside  where a damaged store was put, if one was found
    void start(const std::optional<std::filesystem::path>& set_aside);
    /// One turn of the loop: reads the clocks once, then what the feed holds.
    void turn();
    /// The batch is due. Failures are logged (the first, then one an hour) and the batch kept.
    void flush_in_time();
    /// Something waits to be written.
    [[nodiscard]] bool unwritten() const { return !m_recorder->empty(); }
    /// Reads what is left, marks the stop, writes everything. @return the writing's error
    [[nodiscard]] estimator::Result<void> stop();

    /// New settings from now on. The store's file stays the old one.
    /// @return the writing's error; the old settings then stay
    [[nodiscard]] estimator::Result<void> apply(config::Settings settings);
    /// The person at the seat came or left.
    void set_session_active(bool active);

    [[nodiscard]] Status status() const override;
    void pause() override;
    void resume() override;
    [[nodiscard]] estimator::Result<void> label(const std::string& label) override;
    [[nodiscard]] estimator::Result<void> flush() override;

private:
    void restore();
    void make_recorder();
    void replace_recorder(); ///< what is unwritten is lost; the counts live on
    void read_clocks();
    void interrupt_all();
    void process(std::span<const estimator::Report> reports);
    void take(const PointerChange& change);
    void know(estimator::PointerIndex pointer);
    void know_waiting();
    void switch_feed();
    void filter_feed();
    void mark(store::EventKind kind, std::string detail,
              std::optional<store::PointerId> pointer = std::nullopt);
    void mark_lasting(); ///< the label and the pause that hold
    [[nodiscard]] estimator::Result<void> write();
    [[nodiscard]] estimator::Result<void> replace_store();
    [[nodiscard]] estimator::Result<void> renumber();
    void note_failure(const estimator::Error& error);
    void note_success();
    void give_up_batch(const estimator::Error& error);
    void prune_daily();
    void tell_if_no_pointer();
    [[nodiscard]] estimator::UtcTime utc_now() const;
    [[nodiscard]] std::uint64_t scored() const;
    [[nodiscard]] std::uint64_t lost_movements() const;
    [[nodiscard]] bool recording() const { return !m_paused && m_session_active; }

    config::Settings m_settings;
    Parts m_parts;
    std::string m_version;

    std::optional<store::Recorder> m_recorder; ///< replaced in place by new settings
    std::optional<estimator::Pipeline> m_pipeline;
    estimator::ReportBatch m_batch;

    ClockReading m_now; ///< of this turn
    ClockWatch m_clock_watch;

    /// By PointerIndex: the store's rows, and who waits for one because the store failed.
    std::array<std::optional<store::PointerId>, estimator::k_max_pointers> m_ids{};
    std::bitset<estimator::k_max_pointers> m_waiting;
    std::string m_condition;
    store::ConditionId m_condition_id = store::k_unlabelled;
    std::map<store::ConditionId, std::string> m_labels; ///< of the conditions taken up so far

    bool m_paused = false;
    bool m_session_active = true;
    bool m_told_no_pointer = false;

    estimator::OutcomeCounts m_earlier_outcomes{}; ///< of recorders replaced
    std::uint64_t m_earlier_presses = 0;
    std::uint64_t m_left_out = 0; ///< single movements that were never stored
    std::size_t m_waiting_events = 0;
    std::size_t m_unmarked = 0; ///< events beyond k_most_waiting_events
    bool m_store_damaged = false;
    std::optional<std::string> m_write_failure;
    std::optional<estimator::PointerTime> m_failure_told;
    std::uint64_t m_scored_written = 0; ///< of this recorder
    std::optional<estimator::UtcTime> m_pruned;
};

} // namespace sagitta::daemon
