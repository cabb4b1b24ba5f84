#include "fixtures.hpp"
#include "input/evdev_pointers.hpp"
#include "input/event_mask.hpp"
#include "input/event_queue.hpp"

#include <array>
#include <doctest/doctest.h>
#include <fcntl.h>
#include <unistd.h>

using namespace sagitta;
using estimator::ErrorCode;
using estimator::PointerKind;

namespace {

/// A non-blocking pipe stands for an event node.
class Node {
public:
    Node() { REQUIRE(::pipe2(m_ends.data(), O_NONBLOCK | O_CLOEXEC) == 0); }
    Node(const Node&) = delete;
    Node& operator=(const Node&) = delete;
    ~Node() {
        ::close(m_ends[0]);
        vanish();
    }
    void send(const std::vector<input_event>& events) const {
        const std::string bytes = tests::raw_bytes(events);
        REQUIRE(::write(m_ends[1], bytes.data(), bytes.size()) ==
                static_cast<ssize_t>(bytes.size()));
    }
    void vanish() {
        if (m_ends[1] >= 0)
            ::close(m_ends[1]);
        m_ends[1] = -1;
    }
    [[nodiscard]] int fd() const { return m_ends[0]; }

private:
    std::array<int, 2> m_ends{};
};

std::vector<input_event> steps(int packets) {
    std::vector<input_event> events;
    for (int i = 1; i <= packets; ++i) {
        events.push_back(tests::event_at(i * 1000, EV_REL, REL_X, i));
        events.push_back(tests::syn_at(i * 1000));
    }
    return events;
}

} // namespace

TEST_CASE("the event mask keeps every key but pointer buttons in the kernel") {
    for (const PointerKind kind :
         {PointerKind::mouse, PointerKind::trackball, PointerKind::pointing_stick,
          PointerKind::touchpad, PointerKind::absolute}) {
        const input::EventMask mask = input::event_mask(kind);
        for (std::size_t code = 0; code < BTN_LEFT; ++code)
            CHECK_FALSE(mask.keys.has(code));
        for (std::size_t code = BTN_LEFT; code <= BTN_TASK; ++code)
            CHECK(mask.keys.has(code));
        for (std::size_t code = KEY_OK; code < KEY_CNT; ++code)
            CHECK_FALSE(mask.keys.has(code));
        CHECK(mask.types.has(EV_SYN));
        CHECK_FALSE(mask.types.has(EV_MSC));
        CHECK(mask.relative.has(REL_HWHEEL_HI_RES));
        CHECK_FALSE(mask.relative.has(REL_MISC));
    }
}

TEST_CASE("the event mask is made of whole longs, as the kernel demands") {
    using Mask = input::EventMask;
    CHECK(decltype(Mask::types)::bytes() % sizeof(long) == 0);
    CHECK(decltype(Mask::keys)::bytes() % sizeof(long) == 0);
    CHECK(decltype(Mask::relative)::bytes() % sizeof(long) == 0);
    CHECK(decltype(Mask::absolute)::bytes() % sizeof(long) == 0);
}

TEST_CASE("only absolute devices may send places and contacts") {
    const input::EventMask mouse = input::event_mask(PointerKind::mouse);
    CHECK_FALSE(mouse.types.has(EV_ABS));
    CHECK_FALSE(mouse.keys.has(BTN_TOUCH));
    const input::EventMask touchpad = input::event_mask(PointerKind::touchpad);
    CHECK(touchpad.types.has(EV_ABS));
    CHECK(touchpad.absolute.has(ABS_X));
    CHECK_FALSE(touchpad.absolute.has(ABS_MT_POSITION_X));
    CHECK(touchpad.keys.has(BTN_TOUCH));
    CHECK(touchpad.keys.has(BTN_TOOL_FINGER));
    CHECK_FALSE(touchpad.keys.has(BTN_STYLUS));
    CHECK(input::event_mask(PointerKind::absolute).keys.has(BTN_STYLUS));
}

TEST_CASE("reading takes all that is there and does not wait for more") {
    const Node node;
    input::EventQueue queue;
    input::PacketAssembler assembler{estimator::PointerIndex{1}};
    estimator::ReportBatch batch;
    CHECK(queue.read(node.fd(), assembler, batch));
    CHECK(batch.empty());
    node.send(steps(600)); // more than one call takes
    CHECK(queue.read(node.fd(), assembler, batch));
    REQUIRE(batch.size() == 600);
    CHECK(batch.back().dx == 600);
    CHECK(queue.read(node.fd(), assembler, batch));
    CHECK(batch.size() == 600);
}

TEST_CASE("a device that has gone is not found, and what it sent before stays") {
    Node node;
    input::EventQueue queue;
    input::PacketAssembler assembler{estimator::PointerIndex{1}};
    estimator::ReportBatch batch;
    node.send(steps(2));
    node.vanish();
    CHECK(queue.read(node.fd(), assembler, batch));
    CHECK(batch.size() == 2);
    const auto gone = queue.read(node.fd(), assembler, batch);
    REQUIRE_FALSE(gone);
    CHECK(gone.error().code == ErrorCode::not_found);
}

TEST_CASE("opening a node that is not there, or is no event device, says so") {
    const tests::TempFolder folder;
    input::PointerNode node{folder.path() / "event9", {}, true};
    node.description.name = "Example Mouse";
    const auto absent = input::EvdevPointer::open(node, estimator::PointerIndex{0});
    REQUIRE_FALSE(absent);
    CHECK(absent.error().code == ErrorCode::not_found);
    CHECK(absent.error().message.find("Example Mouse") != std::string::npos);
    node.node = folder.file("event10", "no device");
    const auto wrong = input::EvdevPointer::open(node, estimator::PointerIndex{0});
    REQUIRE_FALSE(wrong);
    CHECK(wrong.error().message.find("left closed") != std::string::npos);
}
