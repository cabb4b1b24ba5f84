// The part of a recording session that writes, and goes on when the store breaks.
#include "config/calibration_for.hpp"
#include "daemon/recording_session.hpp"

namespace sagitta::daemon {

using estimator::Error;
using estimator::ErrorCode;
using estimator::Result;
using store::EventKind;

Result<void> RecordingSession::write() {
    if (m_recorder->empty()) {
        return {};
    }
    auto written = m_store_damaged ? replace_store() : Result<void>{};
    if (written) {
        written = m_recorder->flush();
    }
    if (!written && written.error().code == ErrorCode::damaged && !m_store_damaged) {
        m_store_damaged = true;
        m_parts.log.error("{}", written.error().message);
        written = replace_store().and_then([this] { return m_recorder->flush(); });
    }
    if (written) {
        note_success();
    } else if (written.error().code == ErrorCode::already_there) {
        give_up_batch(written.error());
    }
    return written;
}

// Opening thoroughly sets a damaged store aside; what waits then goes to a fresh one. Tried again
// with the next batch when that fails.
Result<void> RecordingSession::replace_store() {
    store::OpenOptions options;
    options.thorough = true;
    const auto aside = m_parts.store.reopen(utc_now(), options);
    if (!aside) {
        return tl::unexpected{aside.error()};
    }
    if (*aside) {
        m_parts.log.warn("the store was damaged; it was set aside as {} and a fresh one begun",
                         (*aside)->string());
        mark_lasting();
    }
    return renumber().map([this] { m_store_damaged = false; });
}

// A fresh store gives pointers and conditions other numbers than the old one did.
Result<void> RecordingSession::renumber() {
    auto ids = m_ids;
    std::map<store::PointerId, store::PointerId> pointers;
    for (std::size_t i = 0; i < ids.size(); ++i) {
        if (!ids[i]) {
            continue;
        }
        const auto& description = m_parts.feed.pointers()[i];
        const auto id = m_parts.store.pointer(
            description, config::calibration_for(m_settings, description), utc_now());
        if (!id) {
            return tl::unexpected{id.error()};
        }
        pointers[*ids[i]] = *id;
        ids[i] = *id;
    }
    std::map<store::ConditionId, store::ConditionId> conditions;
    std::map<store::ConditionId, std::string> labels;
    for (const auto& [old, label] : m_labels) {
        const auto id = m_parts.store.condition(label);
        if (!id) {
            return tl::unexpected{id.error()};
        }
        conditions[old] = *id;
        labels[*id] = label;
    }
    if (const auto now = conditions.find(m_condition_id); now != conditions.end()) {
        m_condition_id = now->second;
    }
    m_ids = ids;
    m_labels = std::move(labels);
    m_recorder->renumber(pointers, conditions);
    return {};
}

// Such a batch can never be written, and would keep all later ones out.
void RecordingSession::give_up_batch(const Error& error) {
    m_parts.log.error("{}; this batch is left out", error.message);
    m_left_out += scored() - m_scored_written;
    m_scored_written = scored();
    m_recorder->discard();
    m_waiting_events = 0;
    mark(EventKind::lost_reports, "a batch held movements that were stored already");
}

} // namespace sagitta::daemon
