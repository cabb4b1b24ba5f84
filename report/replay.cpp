#include "report/replay.hpp"

#include "config/calibration_for.hpp"
#include "estimator/pipeline.hpp"
#include "input/recording.hpp"
#include "report/numbers.hpp"
#include "report/progress.hpp"
#include "report/replay_summary.hpp"
#include "report/table.hpp"
#include "store/recorder.hpp"

#include <algorithm>
#include <array>
#include <fmt/format.h>
#include <fstream>

namespace sagitta::report {
namespace {

using estimator::ErrorCode;
using estimator::fail;
using estimator::PointerIndex;

/// Batches of a replay: larger than live ones, since nothing is lost by a kill but time.
constexpr std::size_t k_replay_batch = 8192;
/// Stamps before 2000-01-01 cannot be UTC: they count from the start of a machine or a recording.
constexpr estimator::PointerTime k_year_2000{std::chrono::seconds{946'684'800}};

const char* to_text(input::RecordingFormat format) {
    switch (format) {
    case input::RecordingFormat::raw:
        return "raw";
    case input::RecordingFormat::evemu:
        return "evemu";
    case input::RecordingFormat::libinput_record:
        return "libinput-record";
    }
    return "unknown";
}

/// Names a recording by its size and its first 64 KiB (FNV-1a), so that a second replay of it is
/// noticed even when it held no movement. Source of the hash: Fowler, Noll & Vo, 64 bit.
std::string fingerprint(const std::filesystem::path& file) {
    std::error_code error;
    if (!std::filesystem::is_regular_file(file, error)) {
        return {};
    }
    std::ifstream stream{file, std::ios::binary};
    std::vector<char> head(std::size_t{64} * 1024);
    stream.read(head.data(), static_cast<std::streamsize>(head.size()));
    std::uint64_t hash = 0xcbf29ce484222325U;
    for (std::streamsize i = 0; i < stream.gcount(); ++i) {
        hash ^= static_cast<unsigned char>(head[static_cast<std::size_t>(i)]);
        hash *= 0x100000001b3U;
    }
    return fmt::format("{:016x} {}", hash, std::filesystem::file_size(file, error));
}

store::RecorderOptions recorder_options(const config::Settings& settings) {
    store::RecorderOptions options;
    options.batch_movements = std::max(k_replay_batch, settings.batch_movements);
    options.max_waiting_movements =
        16 * options.batch_movements; // never reached: a failed write ends it
    options.reference_width = settings.rules.scores.reference_width;
    options.keep_movements = settings.detail == config::Detail::movements;
    return options;
}

/// The replay of one recording.
class Replay {
public:
    Replay(const ReplayRequest& request, const Session& session, store::Store* store,
           const std::filesystem::path& file)
        : m_request{request}, m_session{session}, m_store{store}, m_file{file},
          m_recorder{store, recorder_options(session.settings)}, m_pipeline{session.settings.rules,
                                                                            m_recorder} {
        m_found.file = file.string();
    }

    Result<ReplayedRecording> run();
    [[nodiscard]] bool cpi_assumed() const { return m_cpi_assumed; }

private:
    /// Before the pipeline sees a batch; `first`: the recording's first.
    Result<void> prepare(const input::Recording& recording, bool first);
    Result<void> place_in_time(const input::Recording& recording);
    Result<void> refuse_second_time();
    Result<void> meet_pointers(std::span<const estimator::PointerDescription> pointers);
    Result<estimator::Calibration> calibration_of(const estimator::PointerDescription& pointer);
    Result<void> flush();

    const ReplayRequest& m_request;
    const Session& m_session;
    store::Store* m_store;
    std::filesystem::path m_file;
    store::Recorder m_recorder;
    estimator::Pipeline m_pipeline;
    ReplayedRecording m_found;
    std::size_t m_known = 0;                         ///< pointers that were made known
    std::optional<store::PointerId> m_first_pointer; ///< its row in the store
    bool m_cpi_assumed = false;
};

Result<void> Replay::place_in_time(const input::Recording& recording) {
    const estimator::PointerTime first = recording.first_stamp();
    if (m_request.start) {
        const auto start = parse_time(*m_request.start, m_session.calendar);
        if (!start) {
            return tl::unexpected{start.error()};
        }
        m_found.start = *start;
        m_recorder.set_clock({start->time_since_epoch() - first.time_since_epoch()});
        return {};
    }
    if (first >= k_year_2000) {
        m_found.start = UtcTime{first.time_since_epoch()};
        return {};
    }
    if (m_store != nullptr) {
        return fail(ErrorCode::bad_value,
                    fmt::format("{}: its stamps begin at {:.6f} s, not at a date, so its movements "
                                "cannot be placed in time; say when it began with --start TIME, "
                                "such as --start 2026-11-23T09:00:00Z",
                                m_file.string(), estimator::seconds(first.time_since_epoch())));
    }
    return {};
}

Result<void> Replay::refuse_second_time() {
    if (m_store == nullptr || !m_found.start) {
        return {};
    }
    const std::string mark = fingerprint(m_file);
    const UtcTime start = *m_found.start;
    const auto events = m_store->events({start, start + estimator::Micros{1}, std::nullopt});
    if (!events) {
        return tl::unexpected{events.error()};
    }
    for (const store::StoredEvent& event : *events) {
        if (event.kind == store::EventKind::replayed && event.pointer == m_first_pointer &&
            !mark.empty() && event.detail == mark) {
            return fail(ErrorCode::already_there,
                        fmt::format("{}: this recording is in {} already; nothing was counted "
                                    "twice",
                                    m_file.string(), m_store->file().string()));
        }
    }
    m_recorder.add_event({start, store::EventKind::replayed, m_first_pointer, mark});
    return {};
}

Result<estimator::Calibration>
Replay::calibration_of(const estimator::PointerDescription& pointer) {
    config::CalibrationOverrides overrides;
    if (m_request.gain) {
        auto flat = estimator::Gain::flat(*m_request.gain);
        if (!flat) {
            return tl::unexpected{flat.error()};
        }
        overrides.gain = *flat;
    }
    if (m_request.cpi) {
        overrides.cpi = estimator::Cpi::of(*m_request.cpi);
    }
    return config::calibration_for(m_session.settings, pointer, overrides);
}

Result<void> Replay::meet_pointers(std::span<const estimator::PointerDescription> pointers) {
    for (; m_known < pointers.size(); ++m_known) {
        estimator::PointerDescription pointer = pointers[m_known];
        if (m_known == 0 && m_request.pointer) {
            pointer.name = *m_request.pointer;
        }
        auto calibration = calibration_of(pointer);
        if (!calibration) {
            return tl::unexpected{calibration.error()};
        }
        m_cpi_assumed |= calibration->cpi_source == estimator::CpiSource::assumed;
        const auto index = static_cast<PointerIndex>(m_known);
        if (m_store != nullptr) {
            const auto id = m_store->pointer(pointer, *calibration, m_session.now);
            if (!id) {
                return tl::unexpected{id.error()};
            }
            m_recorder.set_pointer(index, *id);
            m_first_pointer = m_first_pointer.value_or(*id);
        } else {
            m_recorder.set_pointer(index, store::PointerId{static_cast<std::int64_t>(m_known) + 1});
        }
        m_pipeline.set_pointer(index, *calibration);
        m_found.pointers.push_back(pointer.name);
    }
    return {};
}

Result<void> Replay::prepare(const input::Recording& recording, bool first) {
    if (first) {
        if (auto placed = place_in_time(recording); !placed) {
            return placed;
        }
    }
    if (auto met = meet_pointers(recording.pointers()); !met) {
        return met;
    }
    return first ? refuse_second_time() : Result<void>{};
}

Result<void> Replay::flush() {
    if (const auto flushed = m_recorder.flush(); !flushed) {
        return fail(flushed.error().code, m_file.string() + ": " + flushed.error().message);
    }
    return {};
}

Result<ReplayedRecording> Replay::run() {
    auto recording = input::open_recording(m_file);
    if (!recording) {
        return tl::unexpected{recording.error()};
    }
    Progress progress{m_session.show_progress};
    estimator::ReportBatch batch;
    for (bool first = true;; first = false) {
        if (const auto read = (*recording)->next(batch); !read) {
            return tl::unexpected{read.error()};
        }
        if (batch.empty()) {
            break;
        }
        if (const auto ready = prepare(**recording, first); !ready) {
            return tl::unexpected{ready.error()};
        }
        m_pipeline.process(batch);
        m_found.reports += batch.size();
        if (m_recorder.full()) {
            if (const auto flushed = flush(); !flushed) {
                return tl::unexpected{flushed.error()};
            }
        }
        if (progress.due()) {
            progress.say(fmt::format("replaying {}: {}", m_file.filename().string(),
                                     count_of(m_found.reports, "report")));
        }
    }
    m_pipeline.finish();
    if (const auto flushed = flush(); !flushed) {
        return tl::unexpected{flushed.error()};
    }
    m_found.format = to_text((*recording)->format());
    m_found.remarks = (*recording)->remarks();
    m_found.totals = m_recorder.totals();
    return m_found;
}

/// The error of a recording, and what becomes of those before it.
estimator::Error with_what_stays(estimator::Error error, const ReplaySummary& done) {
    if (!done.recordings.empty()) {
        error.message += fmt::format(
            "; {} before it {}", count_of(done.recordings.size(), "recording"),
            done.store_file.empty() ? "could be read" : "stay stored in " + done.store_file);
    }
    return error;
}

/// Looks at what was named before anything is made or moved: the first recording can be read, and a
/// store that exists begins like one. (A damaged store is put aside; a recording named as the store
/// by mistake must stay where it is.)
Result<void> check_request(const ReplayRequest& request, const Session& session) {
    if (!request.recordings.empty()) {
        if (const auto first = input::open_recording(request.recordings.front()); !first) {
            return tl::unexpected{first.error()};
        }
    }
    std::error_code ignored;
    if (!session.store_named || !std::filesystem::is_regular_file(session.store_file, ignored)) {
        return {};
    }
    constexpr std::string_view k_magic = "SQLite format 3";
    std::string begin(k_magic.size(), '\0');
    std::ifstream file{session.store_file, std::ios::binary};
    file.read(begin.data(), static_cast<std::streamsize>(begin.size()));
    if (file.gcount() == static_cast<std::streamsize>(begin.size()) && begin != k_magic) {
        return fail(ErrorCode::bad_format,
                    fmt::format("{} is no store and stays as it is; name a store's file, or one "
                                "that does not exist yet, after --store",
                                session.store_file.string()));
    }
    return {};
}

} // namespace

Result<Output> run_replay(const ReplayRequest& request, const Session& session) {
    if (const auto checked = check_request(request, session); !checked) {
        return tl::unexpected{checked.error()};
    }
    ReplaySummary summary;
    std::optional<store::Store> store;
    std::string set_aside;
    if (session.store_named) {
        auto opened = store::Store::open(session.store_file, store::Mode::read_write, session.now);
        if (!opened) {
            return tl::unexpected{opened.error()};
        }
        if (opened->set_aside) {
            set_aside =
                wrapped(fmt::format("The store {} was damaged; it was put aside as {} and "
                                    "a fresh one begun.",
                                    session.store_file.string(), opened->set_aside->string()));
        }
        store = std::move(opened->store);
        summary.store_file = session.store_file.string();
    }
    for (const std::filesystem::path& file : request.recordings) {
        Replay replay{request, session, store ? &*store : nullptr, file};
        auto found = replay.run();
        if (!found) {
            return tl::unexpected{with_what_stays(found.error(), summary)};
        }
        summary.cpi_assumed |= replay.cpi_assumed();
        summary.recordings.push_back(std::move(*found));
    }
    return Output{session.json ? replay_json(summary) : set_aside + replay_text(summary, session)};
}

} // namespace sagitta::report
