#include "report/demo.hpp"

#include "estimator/hand/desk.hpp"
#include "estimator/pipeline.hpp"
#include "report/first_look.hpp"
#include "report/numbers.hpp"
#include "report/progress.hpp"
#include "report/table.hpp"
#include "report/week.hpp"
#include "store/recorder.hpp"

#include <fmt/format.h>
#include <nlohmann/json.hpp>

namespace sagitta::report {
namespace {

using estimator::ErrorCode;
using estimator::fail;
using estimator::hand::Desk;

constexpr std::size_t k_demo_batch = 8192;

Result<void> clear_place(const Session& session, const std::filesystem::path& file) {
    std::error_code error;
    if (session.store_named) {
        if (std::filesystem::exists(file, error)) {
            return fail(ErrorCode::already_there,
                        file.string() + " exists already, and the demo writes only into a fresh "
                                        "store; name another file with --store");
        }
        return {};
    }
    for (const char* suffix : {"", "-wal", "-shm"}) {
        std::filesystem::remove(file.string() + suffix, error);
        if (error) {
            return fail(ErrorCode::io, fmt::format("the demo's old store {}{} could not be "
                                                   "replaced: {}; remove it or name another with "
                                                   "--store",
                                                   file.string(), suffix, error.message()));
        }
    }
    return {};
}

/// Weeks of the map room that end with the last full week.
estimator::hand::DeskPlan plan_of(const DemoRequest& request, Day last_monday,
                                  const Calendar& calendar) {
    const Day first = last_monday - date::days{7 * (request.weeks - 1)};
    const auto first_day = std::chrono::sys_days{first.time_since_epoch()};
    auto plan = estimator::hand::map_room_desk(request.seed, request.weeks, first_day);
    plan.utc_offset = UtcTime{first_day} - calendar.start_of(first);
    return plan;
}

Result<void> meet_pointers(const Desk& desk, store::Store& store, store::Recorder& recorder,
                           estimator::Pipeline& pipeline, UtcTime now) {
    for (std::size_t p = 0; p < desk.pointers().size(); ++p) {
        const estimator::PointerDescription& pointer = desk.pointers()[p];
        auto gain = estimator::Gain::flat(desk.plan().pointers.at(p).gain);
        if (!gain) {
            return tl::unexpected{gain.error()};
        }
        const auto calibration =
            estimator::calibrate(pointer, desk.plan().pointers.at(p).electronics.cpi,
                                 estimator::CpiSource::config, std::move(*gain));
        const auto id = store.pointer(pointer, calibration, now);
        if (!id) {
            return tl::unexpected{id.error()};
        }
        const auto index = static_cast<estimator::PointerIndex>(p);
        recorder.set_pointer(index, *id);
        pipeline.set_pointer(index, calibration);
    }
    return {};
}

/// @return reports that the desk made
Result<std::uint64_t> work(Desk& desk, store::Store& store, const Session& session) {
    store::RecorderOptions options;
    options.batch_movements = k_demo_batch;
    options.max_waiting_movements = 16 * k_demo_batch;
    options.reference_width = session.settings.rules.scores.reference_width;
    store::Recorder recorder{&store, options};
    estimator::Pipeline pipeline{session.settings.rules, recorder};
    if (auto met = meet_pointers(desk, store, recorder, pipeline, desk.begin()); !met) {
        return tl::unexpected{met.error()};
    }
    Progress progress{session.show_progress};
    estimator::ReportBatch batch;
    std::uint64_t reports = 0;
    while (true) {
        if (const auto made = desk.next(batch); !made) {
            return tl::unexpected{made.error()};
        }
        if (batch.empty()) {
            break;
        }
        pipeline.process(batch);
        reports += batch.size();
        if (recorder.full()) {
            if (const auto flushed = recorder.flush(); !flushed) {
                return tl::unexpected{flushed.error()};
            }
        }
        if (progress.due()) {
            progress.say(fmt::format("the simulated hand works: {}, {}",
                                     to_text(session.calendar.day_of(desk.now())),
                                     count_of(reports, "report")));
        }
    }
    pipeline.finish();
    if (const auto flushed = recorder.flush(); !flushed) {
        return tl::unexpected{flushed.error()};
    }
    return reports;
}

Result<FirstLook> look_at(const store::Store& store, const Session& session) {
    FirstLookBuilder builder{session.calendar, session.settings.confidence};
    const auto read =
        store.for_each_hour({}, [&](const store::StoredHour& hour) { builder.add(hour); });
    if (!read) {
        return tl::unexpected{read.error()};
    }
    const auto pointers = store.pointers();
    if (!pointers) {
        return tl::unexpected{pointers.error()};
    }
    return builder.build(*pointers);
}

std::string introduction(const DemoRequest& request, const std::filesystem::path& file,
                         std::uint64_t reports) {
    return wrapped(fmt::format(
               "A demonstration. The map room of a county archive tries an upright mouse against a "
               "thumb trackball: "
               "{} at one desk, simulated, {} through the same pipeline as a live pointer's, "
               "stored in {}.",
               count_of(static_cast<std::uint64_t>(request.weeks), "week"),
               count_of(reports, "report"), file.string())) +
           "\n";
}

std::string how_to_go_live(const std::filesystem::path& file, Day last_monday) {
    return "\n" + wrapped("To look further at the demo:") +
           fmt::format("  sagitta week --store {} --ending {} --by direction\n", file.string(),
                       to_text(last_monday + date::days{6})) +
           fmt::format("  sagitta export --store {} --format csv\n\n", file.string()) +
           wrapped("To go live on your own pointers, install the package, then:") +
           "  systemctl --user enable --now sagittad   # starts recording, now and at each login\n"
           "  sagitta check                            # names what still keeps it from working\n"
           "  sagitta week                             # after a day of work\n";
}

} // namespace

std::filesystem::path demo_file() {
    return store::default_file().parent_path() / "demo.db";
}

Result<Output> run_demo(const DemoRequest& request, const Session& session) {
    const std::filesystem::path file = session.store_named ? session.store_file : demo_file();
    if (auto cleared = clear_place(session, file); !cleared) {
        return tl::unexpected{cleared.error()};
    }
    const Day last_monday = monday_of(session.calendar.day_of(session.now)) - date::days{7};
    auto desk = Desk::make(plan_of(request, last_monday, session.calendar));
    if (!desk) {
        return tl::unexpected{desk.error()};
    }
    auto opened = store::Store::open(file, store::Mode::read_write, session.now);
    if (!opened) {
        return tl::unexpected{opened.error()};
    }
    const auto reports = work(**desk, opened->store, session);
    if (!reports) {
        return tl::unexpected{reports.error()};
    }
    const auto week = read_week(opened->store, last_monday, session);
    if (!week) {
        return tl::unexpected{week.error()};
    }
    const auto look = look_at(opened->store, session);
    if (!look) {
        return tl::unexpected{look.error()};
    }
    if (session.json) {
        auto json = nlohmann::ordered_json::parse(week_json(*week, WeekDetail::summary, session));
        json["store"] = file.string();
        json["reports"] = *reports;
        return Output{json.dump(2) + "\n"};
    }
    return Output{introduction(request, file, *reports) +
                  week_text(*week, WeekDetail::summary, session) + "\n" +
                  first_look_text(*look, session) + how_to_go_live(file, last_monday)};
}

} // namespace sagitta::report
