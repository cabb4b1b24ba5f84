// A recording session with a feed and clocks of the test's own, and a store on disk.
#pragma once

#include "daemon/recording_session.hpp"
#include "support.hpp"

#include <doctest/doctest.h>
#include <spdlog/sinks/ostream_sink.h>
#include <sstream>

namespace sagitta::test {

using namespace std::chrono_literals;
using daemon::PointerChange;
using estimator::Outcome;
using estimator::PointerIndex;
using store::EventKind;

class FakeFeed final : public daemon::PointerFeed {
public:
    [[nodiscard]] estimator::Result<void> next(estimator::ReportBatch& batch) override {
        batch = std::exchange(waiting, {});
        return {};
    }
    [[nodiscard]] std::span<const estimator::PointerDescription> pointers() const override {
        return described;
    }
    [[nodiscard]] std::vector<PointerChange> take_changes() override {
        return std::exchange(changes, {});
    }
    void enable(bool on) override { enabled = on; }
    void set_filter(Filter new_filter) override { filter = std::move(new_filter); }
    [[nodiscard]] std::vector<std::string> refused() const override { return {}; }
    [[nodiscard]] bool is_open(PointerIndex pointer) const override {
        return enabled && static_cast<std::size_t>(pointer) < described.size();
    }

    void plug(const std::string& name) {
        described.push_back({});
        described.back().name = name;
        changes.push_back(
            {PointerChange::Kind::plugged, static_cast<PointerIndex>(described.size() - 1), {}});
    }

    estimator::ReportBatch waiting;
    std::vector<estimator::PointerDescription> described;
    std::vector<PointerChange> changes;
    Filter filter;
    bool enabled = false;
};

class FakeClocks final : public daemon::Clocks {
public:
    [[nodiscard]] daemon::ClockReading read() override {
        return {estimator::UtcTime{k_epoch + monotonic + asleep + set},
                estimator::PointerTime{monotonic}, monotonic + asleep};
    }
    static constexpr estimator::Micros k_epoch = std::chrono::hours{24 * 20000};
    estimator::Micros monotonic = 100s;
    estimator::Micros asleep = 0s;
    estimator::Micros set = 0s;
};

inline store::Store open_store(const std::filesystem::path& file) {
    auto opened =
        store::Store::open(file, store::Mode::read_write, estimator::UtcTime{FakeClocks::k_epoch});
    REQUIRE(opened);
    return std::move(opened->store);
}

struct Desk {
    explicit Desk(const std::filesystem::path& file, config::Settings settings = {})
        : store_file{file}, store{open_store(file)}, session{std::move(settings),
                                                             {feed, clocks, store, log},
                                                             "0.0"} {
        session.start(std::nullopt);
        feed.plug("mouse");
        session.turn();
    }
    /// One click, 2 s of time.
    void click() {
        const auto start =
            std::chrono::duration_cast<std::chrono::milliseconds>(clocks.monotonic).count();
        const auto reports = click_at(start + 1000, PointerIndex{0});
        clocks.monotonic += 2s;
        feed.waiting.insert(feed.waiting.end(), reports.begin(), reports.end());
        session.turn();
    }
    /// Runs SQL behind the store's back.
    void meddle(const char* sql) const;
    void break_store() const {
        meddle("CREATE TRIGGER broken BEFORE INSERT ON movement BEGIN "
               "SELECT RAISE(ABORT, 'broken by the test'); END");
    }
    [[nodiscard]] std::vector<store::StoredMovement> movements() const {
        std::vector<store::StoredMovement> found;
        REQUIRE(store.for_each_movement({}, [&](const auto& row) { found.push_back(row); }));
        return found;
    }
    [[nodiscard]] int events(EventKind kind) const {
        const auto all = store.events({});
        REQUIRE(all);
        int count = 0;
        for (const auto& event : *all) {
            count += event.kind == kind ? 1 : 0;
        }
        return count;
    }
    [[nodiscard]] std::uint64_t outcomes(Outcome outcome) const {
        return session.status().outcomes[static_cast<std::size_t>(outcome)];
    }

    std::filesystem::path store_file;
    FakeFeed feed;
    FakeClocks clocks;
    store::Store store;
    std::ostringstream log_text;
    spdlog::logger log{"test", std::make_shared<spdlog::sinks::ostream_sink_st>(log_text)};
    daemon::RecordingSession session;
};

} // namespace sagitta::test
