#include "daemon/live_pointers.hpp"
#include "support.hpp"

#include <doctest/doctest.h>
#include <fcntl.h>
#include <fstream>
#include <unistd.h>

using namespace sagitta;
using daemon::LivePointers;
using daemon::PointerChange;
using estimator::PointerIndex;

namespace {

/// A device behind a pipe: one byte a packet makes it readable, as the kernel would.
struct FakeDevice {
    FakeDevice(std::string device_node, std::string device_name) {
        node.node = std::move(device_node);
        node.description.name = std::move(device_name);
        node.readable = true;
        REQUIRE(pipe2(ends, O_NONBLOCK | O_CLOEXEC) == 0);
    }
    FakeDevice(const FakeDevice&) = delete;
    FakeDevice& operator=(const FakeDevice&) = delete;
    ~FakeDevice() {
        ::close(ends[0]);
        if (!gone) {
            ::close(ends[1]);
        }
    }
    void move(long long ms) {
        estimator::Report report;
        report.time = test::at_ms(ms);
        report.dx = 3;
        waiting.push_back(report);
        REQUIRE(::write(ends[1], "x", 1) == 1);
    }
    void vanish() {
        gone = true;
        ::close(ends[1]);
    }

    input::PointerNode node;
    int ends[2] = {-1, -1};
    estimator::ReportBatch waiting;
    bool gone = false;
    bool locked = false;
    int reads = 0;
};

class FakePointer final : public daemon::OpenPointer {
public:
    FakePointer(FakeDevice& device, PointerIndex index) : m_device{device}, m_index{index} {}
    [[nodiscard]] int file_descriptor() const override { return m_device.ends[0]; }
    [[nodiscard]] estimator::Result<void> read(estimator::ReportBatch& batch) override {
        ++m_device.reads;
        char bytes[256];
        while (::read(m_device.ends[0], bytes, sizeof bytes) > 0) {
        }
        for (estimator::Report report : m_device.waiting) {
            report.pointer = m_index;
            batch.push_back(report);
        }
        m_device.waiting.clear();
        if (m_device.gone) {
            return estimator::fail(estimator::ErrorCode::not_found, "it was unplugged");
        }
        return {};
    }

private:
    FakeDevice& m_device;
    PointerIndex m_index;
};

class FakeDevices final : public daemon::PointerDevices {
public:
    [[nodiscard]] estimator::Result<std::vector<input::PointerNode>> list() override {
        std::vector<input::PointerNode> nodes;
        for (const auto* device : present) {
            nodes.push_back(device->node);
        }
        return nodes;
    }
    [[nodiscard]] estimator::Result<std::unique_ptr<daemon::OpenPointer>>
    open(const input::PointerNode& node, PointerIndex index) override {
        for (auto* device : present) {
            if (device->node.node == node.node && !device->locked) {
                return std::make_unique<FakePointer>(*device, index);
            }
        }
        return estimator::fail(estimator::ErrorCode::no_permission,
                               node.node.string() + " may not be read");
    }
    std::vector<FakeDevice*> present;
};

/// Live pointers on a loop of their own, and what they delivered.
struct Bench {
    explicit Bench(std::vector<FakeDevice*> devices_present) {
        devices.present = std::move(devices_present);
        pointers.enable(true);
        turn();
    }
    void turn() {
        REQUIRE(pointers.next(batch));
        all.insert(all.end(), batch.begin(), batch.end());
        for (auto& change : pointers.take_changes()) {
            changes.push_back(std::move(change));
        }
    }
    /// Until a turn finds nothing, or nothing is left that could wake the loop.
    void run_until_still() {
        loop.restart();
        int seen = turns;
        while (loop.run_one() > 0) {
            if (turns != seen && batch.empty()) {
                return;
            }
            seen = turns;
        }
    }

    boost::asio::io_context loop;
    FakeDevices devices;
    int turns = 0;
    LivePointers pointers{loop, devices, [this] {
                              ++turns;
                              turn();
                          }};
    estimator::ReportBatch batch;
    estimator::ReportBatch all;
    std::vector<PointerChange> changes;
};

/// Whether any epoll instance of this process watches the descriptor.
bool watched_by_epoll(int fd) {
    for (const auto& entry : std::filesystem::directory_iterator("/proc/self/fdinfo")) {
        std::ifstream info{entry.path()};
        std::string word;
        while (info >> word) {
            int watched = -1;
            if (word == "tfd:" && info >> watched && watched == fd) {
                return true;
            }
        }
    }
    return false;
}

} // namespace

TEST_CASE("a moving pointer is out of the loop, and one reading takes all that gathered") {
    FakeDevice mouse{"/dev/input/event3", "mouse"};
    Bench bench{{&mouse}};
    REQUIRE(bench.changes.size() == 1);
    CHECK(watched_by_epoll(mouse.ends[0]));

    mouse.move(1);
    bench.loop.run_one(); // the first wake-up reads nothing yet
    CHECK(mouse.reads == 0);
    CHECK_FALSE(watched_by_epoll(mouse.ends[0]));
    for (int ms = 2; ms <= 10; ++ms) {
        mouse.move(ms);
    }
    bench.loop.run_one(); // the timer
    CHECK(mouse.reads == 1);
    CHECK(bench.all.size() == 10);
}

TEST_CASE("a pointer that comes to rest goes back to waiting, with no timer left") {
    FakeDevice mouse{"/dev/input/event3", "mouse"};
    Bench bench{{&mouse}};
    mouse.move(1);
    bench.run_until_still();
    CHECK(watched_by_epoll(mouse.ends[0]));
    // Nothing but the wait is left: closing the pointer leaves the loop without work.
    bench.pointers.enable(false);
    bench.loop.restart();
    bench.loop.run();
    CHECK_FALSE(bench.pointers.is_open(PointerIndex{0}));
    CHECK(bench.all.size() == 1);
}

TEST_CASE("an event that arrives just before the pointer goes back to waiting is not lost") {
    FakeDevice mouse{"/dev/input/event3", "mouse"};
    Bench bench{{&mouse}};
    mouse.move(1);
    bench.run_until_still();
    mouse.move(2);
    bench.run_until_still();
    CHECK(bench.all.size() == 2);
}

TEST_CASE("reports of two pointers come in the order of time") {
    FakeDevice mouse{"/dev/input/event3", "mouse"};
    FakeDevice ball{"/dev/input/event4", "ball"};
    Bench bench{{&mouse, &ball}};
    for (const long long ms : {1, 4, 6}) {
        mouse.move(ms);
    }
    for (const long long ms : {2, 3, 7}) {
        ball.move(ms);
    }
    bench.run_until_still();
    while (bench.all.size() < 6) {
        bench.run_until_still();
    }
    for (std::size_t i = 1; i < bench.all.size(); ++i) {
        CHECK(bench.all[i - 1].time < bench.all[i].time);
    }
}

TEST_CASE("a pointer that vanishes delivers what it had, is told gone, and gets its place back") {
    FakeDevice mouse{"/dev/input/event3", "mouse"};
    FakeDevice again{"/dev/input/event9", "mouse"};
    Bench bench{{&mouse}};
    mouse.move(1);
    mouse.vanish();
    bench.devices.present.clear();
    bench.run_until_still();
    CHECK(bench.all.size() == 1);
    REQUIRE(bench.changes.size() == 2);
    CHECK(bench.changes[1].kind == PointerChange::Kind::unplugged);
    CHECK(bench.changes[1].message == "it was unplugged");
    CHECK_FALSE(bench.pointers.is_open(PointerIndex{0}));

    bench.devices.present = {&again};
    bench.pointers.look_again();
    REQUIRE(bench.changes.size() == 3);
    CHECK(bench.changes[2].kind == PointerChange::Kind::plugged);
    CHECK(bench.changes[2].pointer == PointerIndex{0});
    CHECK(bench.pointers.pointers().size() == 1);
    again.move(2);
    bench.run_until_still();
    CHECK(bench.all.size() == 2);
}

TEST_CASE("two pointers of the same make have a place each") {
    FakeDevice left{"/dev/input/event3", "mouse"};
    FakeDevice right{"/dev/input/event4", "mouse"};
    const Bench bench{{&left, &right}};
    CHECK(bench.pointers.pointers().size() == 2);
}

TEST_CASE("a pointer that may not be read is told once, and opened when it may") {
    FakeDevice mouse{"/dev/input/event3", "mouse"};
    mouse.locked = true;
    Bench bench{{&mouse}};
    bench.pointers.look_again();
    bench.pointers.look_again();
    REQUIRE(bench.changes.size() == 1);
    CHECK(bench.changes[0].kind == PointerChange::Kind::refused);
    CHECK(bench.pointers.refused().size() == 1);

    mouse.locked = false;
    bench.pointers.look_again();
    CHECK(bench.pointers.is_open(PointerIndex{0}));
    CHECK(bench.pointers.refused().empty());
}

TEST_CASE("an ignored pointer is never opened, and closed when it becomes ignored") {
    FakeDevice mouse{"/dev/input/event3", "mouse"};
    FakeDevice pad{"/dev/input/event4", "pad"};
    Bench bench{{&mouse}};
    bench.pointers.set_filter([](const auto& pointer) { return pointer.name != "pad"; });
    bench.devices.present.push_back(&pad);
    bench.pointers.look_again();
    CHECK(bench.pointers.pointers().size() == 1);

    bench.pointers.set_filter([](const auto& pointer) { return pointer.name == "pad"; });
    bench.turn();
    CHECK_FALSE(bench.pointers.is_open(PointerIndex{0}));
    CHECK(bench.pointers.is_open(PointerIndex{1}));
}
