#include "daemon/recording_session.hpp"

#include "config/calibration_for.hpp"

#include <fmt/format.h>
#include <utility>

namespace sagitta::daemon {

using estimator::Error;
using estimator::ErrorCode;
using estimator::Outcome;
using estimator::PointerIndex;
using estimator::Report;
using estimator::Result;
using store::EventKind;
using namespace std::chrono_literals;

namespace {

constexpr auto k_retell_failure = 1h;
constexpr auto k_prune_every = 24h;
/// How far back a label or a pause is looked for.
constexpr std::chrono::days k_memory{400};

// Details of events that the next session takes up again.
constexpr std::string_view k_by_request = "by request";
constexpr std::string_view k_condition_prefix = "condition: ";

double seconds(estimator::Micros duration) {
    return estimator::seconds(duration);
}

std::uint64_t count(const estimator::OutcomeCounts& counts, Outcome outcome) {
    return counts[static_cast<std::size_t>(outcome)];
}

} // namespace

RecordingSession::RecordingSession(config::Settings settings, const Parts& parts,
                                   std::string version)
    : m_settings{std::move(settings)}, m_parts{parts}, m_version{std::move(version)},
      m_now{parts.clocks.read()}, m_clock_watch{m_now} {
    make_recorder();
    m_pipeline.emplace(m_settings.rules, *m_recorder);
}

RecordingSession::~RecordingSession() = default;

void RecordingSession::start(const std::optional<std::filesystem::path>& set_aside) {
    restore();
    mark(EventKind::started, "version " + m_version);
    if (set_aside) {
        m_parts.log.warn("the store was damaged; it was set aside as {} and a fresh one begun",
                         set_aside->string());
    }
    prune_daily();
    filter_feed();
    if (m_paused) {
        m_parts.log.warn("recording is paused since before the start; resume it when you like");
    } else {
        switch_feed();
    }
}

// The last label and the last pause hold until they are changed, also over a restart.
void RecordingSession::restore() {
    const auto events = m_parts.store.events({utc_now() - k_memory, std::nullopt, std::nullopt});
    if (!events) {
        m_parts.log.warn("cannot look up the last label: {}, ignoring", events.error().message);
        return;
    }
    for (const store::StoredEvent& event : *events) {
        if (event.detail == k_by_request) {
            m_paused = event.kind == EventKind::paused;
        } else if (event.kind == EventKind::settings &&
                   event.detail.starts_with(k_condition_prefix)) {
            m_condition = event.detail.substr(k_condition_prefix.size());
        }
    }
    if (m_condition.empty()) {
        return;
    }
    if (const auto id = m_parts.store.condition(m_condition)) {
        m_condition_id = *id;
        m_labels[*id] = m_condition;
        m_recorder->set_condition(*id);
    } else {
        m_parts.log.warn("cannot take up the label \"{}\": {}, ignoring", m_condition,
                         id.error().message);
        m_condition.clear();
    }
}

// In place, because the pipeline keeps its sink.
void RecordingSession::make_recorder() {
    m_recorder.emplace(&m_parts.store,
                       store::RecorderOptions{m_settings.batch_movements,
                                              m_settings.rules.scores.reference_width,
                                              m_settings.detail == config::Detail::movements});
    m_recorder->set_clock(m_clock_watch.offset());
    m_recorder->set_condition(m_condition_id);
    for (std::size_t i = 0; i < m_ids.size(); ++i) {
        if (m_ids[i]) {
            m_recorder->set_pointer(static_cast<PointerIndex>(i), *m_ids[i]);
        }
    }
    m_scored_written = 0;
}

void RecordingSession::replace_recorder() {
    const auto& totals = m_recorder->totals();
    for (std::size_t i = 0; i < m_earlier_outcomes.size(); ++i) {
        m_earlier_outcomes[i] += totals.outcomes[i];
    }
    m_earlier_presses += totals.presses;
    m_left_out += m_recorder->given_up();
    make_recorder();
}

void RecordingSession::turn() {
    read_clocks();
    if (const auto read = m_parts.feed.next(m_batch); !read) {
        m_parts.log.error("{}", read.error().message);
    }
    process(m_batch);
    for (const PointerChange& change : m_parts.feed.take_changes()) {
        take(change);
    }
    tell_if_no_pointer();
    if (m_recorder->full()) {
        flush_in_time();
    }
}

void RecordingSession::read_clocks() {
    m_now = m_parts.clocks.read();
    const ClockNews news = m_clock_watch.update(m_now);
    if (news.slept || news.step) {
        interrupt_all(); // with the offset that held for those runs
    }
    m_recorder->set_clock(m_clock_watch.offset());
    if (news.slept) {
        mark(EventKind::slept, fmt::format("{:.0f} s", seconds(*news.slept)));
        m_parts.log.info("the machine slept for {:.0f} s", seconds(*news.slept));
    }
    if (news.step) {
        mark(EventKind::clock_step, fmt::format("{:+.1f} s", seconds(*news.step)));
        m_parts.log.info("the clock was set by {:+.1f} s", seconds(*news.step));
    }
}

void RecordingSession::interrupt_all() {
    for (std::size_t i = 0; i < m_ids.size(); ++i) {
        if (m_ids[i]) {
            m_pipeline->interrupt(static_cast<PointerIndex>(i));
        }
    }
}

void RecordingSession::process(std::span<const Report> reports) {
    std::bitset<estimator::k_max_pointers> marked;
    for (const Report& report : reports) {
        const auto index = static_cast<std::size_t>(report.pointer);
        if (report.after_loss && !marked[index]) {
            marked.set(index);
            mark(EventKind::lost_reports, "on the way from the kernel", m_ids[index]);
        }
    }
    m_pipeline->process(reports);
}

void RecordingSession::take(const PointerChange& change) {
    const auto index = static_cast<std::size_t>(change.pointer);
    switch (change.kind) {
    case PointerChange::Kind::plugged:
        know(change.pointer);
        mark(EventKind::plugged, {}, m_ids[index]);
        break;
    case PointerChange::Kind::unplugged:
        m_pipeline->interrupt(change.pointer);
        m_waiting.reset(index);
        mark(EventKind::unplugged, {}, m_ids[index]);
        m_parts.log.info("no longer reading {}: {}", m_parts.feed.pointers()[index].name,
                         change.message);
        break;
    case PointerChange::Kind::refused:
        m_parts.log.warn("{}, ignoring this pointer", change.message);
        break;
    }
}

// Until the store has given a pointer its row, the pipeline does not know it and takes none of its
// reports.
void RecordingSession::know(PointerIndex pointer) {
    const auto index = static_cast<std::size_t>(pointer);
    const estimator::PointerDescription& description = m_parts.feed.pointers()[index];
    const estimator::Calibration calibration = config::calibration_for(m_settings, description);

    if (const auto id = m_parts.store.pointer(description, calibration, utc_now())) {
        m_ids[index] = *id;
    } else if (!m_ids[index]) {
        m_waiting.set(index);
        m_parts.log.error("cannot record {} yet: {}", description.name, id.error().message);
        return;
    }
    m_waiting.reset(index);
    m_recorder->set_pointer(pointer, *m_ids[index]);
    m_pipeline->set_pointer(pointer, calibration);
    m_parts.log.info("reading {} ({}, {:.0f} counts per inch, {})", description.name,
                     to_text(description.kind), calibration.cpi.value(),
                     to_text(calibration.cpi_source));
}

void RecordingSession::know_waiting() {
    for (std::size_t i = 0; i < m_waiting.size() && m_waiting.any(); ++i) {
        if (m_waiting[i]) {
            know(static_cast<PointerIndex>(i));
        }
    }
}

void RecordingSession::tell_if_no_pointer() {
    bool any_open = false;
    for (std::size_t i = 0; i < m_parts.feed.pointers().size(); ++i) {
        any_open = any_open || m_parts.feed.is_open(static_cast<PointerIndex>(i));
    }
    if (any_open || !recording()) {
        m_told_no_pointer = false;
    } else if (!m_told_no_pointer) {
        m_told_no_pointer = true;
        m_parts.log.warn("no pointer can be read; waiting for one. If one is plugged in, run "
                         "\"sagitta check\", which says what keeps it closed and how to mend it");
    }
}

void RecordingSession::mark(EventKind kind, std::string detail,
                            std::optional<store::PointerId> pointer) {
    if (m_waiting_events >= k_most_waiting_events) {
        ++m_unmarked;
        return;
    }
    ++m_waiting_events;
    m_recorder->add_event({utc_now(), kind, pointer, std::move(detail)});
}

// What the next session takes up again from the store.
void RecordingSession::mark_lasting() {
    if (!m_condition.empty()) {
        mark(EventKind::settings, std::string{k_condition_prefix} + m_condition);
    }
    if (m_paused) {
        mark(EventKind::paused, std::string{k_by_request});
    }
}

estimator::UtcTime RecordingSession::utc_now() const {
    return m_clock_watch.offset().to_utc(m_now.monotonic);
}

void RecordingSession::flush_in_time() {
    know_waiting();
    if (const auto written = write(); !written) {
        note_failure(written.error());
    }
}

Result<void> RecordingSession::flush() {
    turn();
    know_waiting();
    auto written = write();
    if (!written) {
        note_failure(written.error());
    }
    return written;
}

void RecordingSession::note_success() {
    if (m_write_failure) {
        m_parts.log.info("the store can be written again; what was kept is stored ({} single "
                         "movements were lost in all)",
                         lost_movements());
    }
    m_write_failure.reset();
    m_failure_told.reset();
    m_waiting_events = 0;
    if (const auto unmarked = std::exchange(m_unmarked, 0); unmarked > 0) {
        mark(EventKind::lost_reports,
             fmt::format("{} events were left out while the store could not be written", unmarked));
    }
    m_scored_written = scored();
    prune_daily();
}

void RecordingSession::note_failure(const Error& error) {
    m_write_failure = error.message;
    if (m_failure_told && m_now.monotonic - *m_failure_told < k_retell_failure) {
        return;
    }
    m_failure_told = m_now.monotonic;
    m_parts.log.error("{}; the movements are kept in memory and written as soon as that works",
                      error.message);
}

std::uint64_t RecordingSession::lost_movements() const {
    return m_left_out + m_recorder->given_up();
}

std::uint64_t RecordingSession::scored() const {
    const auto& outcomes = m_recorder->totals().outcomes;
    return count(outcomes, Outcome::scored_click) + count(outcomes, Outcome::scored_drag);
}

void RecordingSession::prune_daily() {
    if (m_pruned && utc_now() - *m_pruned < k_prune_every) {
        return;
    }
    m_pruned = utc_now();
    if (const auto pruned = m_parts.store.prune_movements(utc_now() - m_settings.keep_movements);
        !pruned) {
        m_parts.log.warn("cannot delete movements beyond their time: {}, ignoring",
                         pruned.error().message);
    }
}

Result<void> RecordingSession::stop() {
    turn();
    m_parts.feed.enable(false);
    interrupt_all();
    mark(EventKind::stopped, {});
    return write();
}

Result<void> RecordingSession::apply(config::Settings settings) {
    turn();
    interrupt_all();
    if (auto written = write(); !written) {
        note_failure(written.error());
        return written;
    }
    if (settings.store_file != m_settings.store_file) {
        m_parts.log.warn("the store stays {} until sagittad is restarted",
                         m_parts.store.file().string());
    }
    m_settings = std::move(settings);
    replace_recorder();
    m_pipeline->set_rules(m_settings.rules);
    mark(EventKind::settings, "read again");
    filter_feed();
    for (std::size_t i = 0; i < m_parts.feed.pointers().size(); ++i) {
        if (m_parts.feed.is_open(static_cast<PointerIndex>(i))) {
            know(static_cast<PointerIndex>(i));
        }
    }
    turn();
    return {};
}

void RecordingSession::filter_feed() {
    m_parts.feed.set_filter([this](const estimator::PointerDescription& pointer) {
        const config::PointerSettings* said = config::settings_for(m_settings, pointer.name);
        return said == nullptr || !said->ignore;
    });
}

void RecordingSession::switch_feed() {
    m_parts.feed.enable(recording());
    if (!recording()) {
        interrupt_all();
    }
    turn();
}

void RecordingSession::set_session_active(bool active) {
    if (active == m_session_active) {
        return;
    }
    turn();
    m_session_active = active;
    mark(active ? EventKind::resumed : EventKind::paused, "session");
    switch_feed();
}

void RecordingSession::pause() {
    if (m_paused) {
        return;
    }
    turn();
    m_paused = true;
    mark(EventKind::paused, std::string{k_by_request});
    m_parts.log.info("paused by request");
    switch_feed();
    flush_in_time();
}

void RecordingSession::resume() {
    if (!m_paused) {
        return;
    }
    m_paused = false;
    read_clocks();
    mark(EventKind::resumed, std::string{k_by_request});
    m_parts.log.info("resumed by request");
    switch_feed();
    flush_in_time();
}

Result<void> RecordingSession::label(const std::string& label) {
    turn();
    const auto id = m_parts.store.condition(label);
    if (!id) {
        return tl::unexpected{id.error()};
    }
    interrupt_all(); // a movement belongs to one condition
    m_condition = label;
    m_condition_id = *id;
    m_labels[*id] = label;
    m_recorder->set_condition(*id);
    mark(EventKind::settings, std::string{k_condition_prefix} + label);
    flush_in_time();
    return {};
}

Status RecordingSession::status() const {
    Status status;
    status.version = m_version;
    status.store_file = m_parts.store.file().string();
    status.condition = m_condition;
    status.refused = m_parts.feed.refused();
    status.unwritten = unwritten();
    status.write_failure = m_write_failure;
    status.lost_movements = lost_movements();
    status.outcomes = m_earlier_outcomes;
    const auto& totals = m_recorder->totals();
    for (std::size_t i = 0; i < status.outcomes.size(); ++i) {
        status.outcomes[i] += totals.outcomes[i];
    }
    status.presses = m_earlier_presses + totals.presses;

    bool any_open = false;
    const auto pointers = m_parts.feed.pointers();
    for (std::size_t i = 0; i < pointers.size(); ++i) {
        const bool open = m_parts.feed.is_open(static_cast<PointerIndex>(i));
        any_open = any_open || open;
        const auto calibration = config::calibration_for(m_settings, pointers[i]);
        status.pointers.push_back({pointers[i].name, to_text(pointers[i].kind),
                                   calibration.cpi.value(), to_text(calibration.cpi_source), open});
    }
    status.state = m_paused            ? "paused"
                   : !m_session_active ? "session_inactive"
                   : any_open          ? "recording"
                                       : "no_pointer";
    return status;
}

} // namespace sagitta::daemon
