#include "fixtures.hpp"
#include "input/packet.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using estimator::PointerKind;
using input::PacketAssembler;
using tests::event_at;
using tests::syn_at;

namespace {

/// Feeds packets one millisecond apart.
class Pad {
public:
    explicit Pad(PointerKind kind) : assembler{estimator::PointerIndex{0}, kind} {}

    struct Item {
        std::uint16_t type, code;
        std::int32_t value;
    };
    /// @return the report of the packet, all zero when it made none
    estimator::Report packet(std::initializer_list<Item> items) {
        m_us += 1000;
        std::vector<input_event> events;
        for (const Item& item : items)
            events.push_back(event_at(m_us, item.type, item.code, item.value));
        events.push_back(syn_at(m_us));
        estimator::ReportBatch batch;
        assembler.add(events, batch);
        return batch.empty() ? estimator::Report{} : batch.back();
    }
    void finger_down(std::int32_t x, std::int32_t y) {
        CHECK(packet({{EV_KEY, BTN_TOUCH, 1},
                      {EV_KEY, BTN_TOOL_FINGER, 1},
                      {EV_ABS, ABS_X, x},
                      {EV_ABS, ABS_Y, y}})
                  .time == estimator::PointerTime{});
    }
    estimator::Report lift() {
        return packet({{EV_KEY, BTN_TOUCH, 0}, {EV_KEY, BTN_TOOL_FINGER, 0}});
    }

    PacketAssembler assembler;

private:
    std::int64_t m_us = 0;
};

} // namespace

TEST_CASE("a finger on a touchpad moves by the difference of its places") {
    Pad pad{PointerKind::touchpad};
    pad.finger_down(1000, 2000);
    const auto both = pad.packet({{EV_ABS, ABS_X, 1010}, {EV_ABS, ABS_Y, 1996}});
    CHECK(both.dx == 10);
    CHECK(both.dy == -4);
    const auto one = pad.packet({{EV_ABS, ABS_Y, 1990}});
    CHECK(one.dx == 0);
    CHECK(one.dy == -6);
    CHECK(one.pressed == 0);
}

TEST_CASE("setting a finger down elsewhere on a touchpad is no motion") {
    Pad pad{PointerKind::touchpad};
    pad.finger_down(1000, 2000);
    (void)pad.lift();
    pad.finger_down(3000, 500);
    CHECK(pad.packet({{EV_ABS, ABS_X, 3001}}).dx == 1);
}

TEST_CASE("an axis that a new touch does not repeat keeps its place") {
    Pad pad{PointerKind::touchpad};
    pad.finger_down(1000, 2000);
    (void)pad.lift();
    // The finger came down at the same X, so the kernel sends Y only.
    (void)pad.packet({{EV_KEY, BTN_TOUCH, 1}, {EV_KEY, BTN_TOOL_FINGER, 1}, {EV_ABS, ABS_Y, 100}});
    CHECK(pad.packet({{EV_ABS, ABS_X, 1003}}).dx == 3);
}

TEST_CASE("two fingers on a touchpad scroll and do not move") {
    Pad pad{PointerKind::touchpad};
    pad.finger_down(1000, 2000);
    (void)pad.packet({{EV_KEY, BTN_TOOL_FINGER, 0}, {EV_KEY, BTN_TOOL_DOUBLETAP, 1}});
    const auto scrolled = pad.packet({{EV_ABS, ABS_Y, 2050}});
    CHECK(scrolled.dy == 0);
    CHECK(scrolled.wheel_120ths == 1);
    const auto back = pad.packet(
        {{EV_KEY, BTN_TOOL_FINGER, 1}, {EV_KEY, BTN_TOOL_DOUBLETAP, 0}, {EV_ABS, ABS_X, 1500}});
    CHECK(back.dx == 0);
    CHECK(pad.packet({{EV_ABS, ABS_X, 1502}}).dx == 2);
}

TEST_CASE("a finger that hovers over a touchpad does not move") {
    Pad pad{PointerKind::touchpad};
    (void)pad.packet({{EV_KEY, BTN_TOOL_FINGER, 1}, {EV_ABS, ABS_X, 10}, {EV_ABS, ABS_Y, 10}});
    CHECK(pad.packet({{EV_ABS, ABS_X, 30}}).dx == 0);
}

TEST_CASE("touching a touchpad is no press, its button is") {
    Pad pad{PointerKind::touchpad};
    pad.finger_down(10, 10);
    CHECK(pad.packet({{EV_KEY, BTN_LEFT, 1}}).pressed == 1);
    CHECK(pad.lift().released == 0);
}

TEST_CASE("after a loss a touchpad starts anew with the next touch") {
    Pad pad{PointerKind::touchpad};
    pad.finger_down(1000, 1000);
    (void)pad.packet({{EV_SYN, SYN_DROPPED, 0}, {EV_ABS, ABS_X, 1100}});
    CHECK(pad.packet({{EV_ABS, ABS_X, 1300}}).dx == 0);
    (void)pad.lift();
    pad.finger_down(2000, 2000);
    const auto first = pad.packet({{EV_ABS, ABS_X, 2005}});
    CHECK(first.dx == 5);
    CHECK(first.after_loss);
}

TEST_CASE("after a loss a touch that the kernel still holds goes on from its next place") {
    Pad pad{PointerKind::touchpad};
    pad.finger_down(1000, 1000);
    (void)pad.packet({{EV_SYN, SYN_DROPPED, 0}});
    constexpr std::array<std::uint16_t, 2> k_down{BTN_TOUCH, BTN_TOOL_FINGER};
    pad.assembler.set_contacts(k_down);
    CHECK(pad.packet({{EV_ABS, ABS_X, 1300}}).dx == 0);
    CHECK(pad.packet({{EV_ABS, ABS_X, 1304}}).dx == 4);
}

TEST_CASE("the touch of a screen is the left button and starts from a new place") {
    Pad screen{PointerKind::absolute};
    const auto down =
        screen.packet({{EV_KEY, BTN_TOUCH, 1}, {EV_ABS, ABS_X, 500}, {EV_ABS, ABS_Y, 600}});
    CHECK(down.pressed == 1);
    CHECK(down.dx == 0);
    CHECK(screen.packet({{EV_ABS, ABS_X, 510}}).dx == 10);
    CHECK(screen.packet({{EV_KEY, BTN_TOUCH, 0}}).released == 1);
    const auto again =
        screen.packet({{EV_KEY, BTN_TOUCH, 1}, {EV_ABS, ABS_X, 50}, {EV_ABS, ABS_Y, 60}});
    CHECK(again.dx == 0);
    CHECK(again.dy == 0);
}

TEST_CASE("a pen moves while it hovers and goes on through its touch") {
    Pad pen{PointerKind::absolute};
    (void)pen.packet({{EV_KEY, BTN_TOOL_PEN, 1}, {EV_ABS, ABS_X, 100}, {EV_ABS, ABS_Y, 100}});
    CHECK(pen.packet({{EV_ABS, ABS_X, 120}}).dx == 20);
    const auto touch = pen.packet({{EV_KEY, BTN_TOUCH, 1}, {EV_ABS, ABS_X, 125}});
    CHECK(touch.dx == 5);
    CHECK(touch.pressed == 1);
    CHECK(pen.packet({{EV_KEY, BTN_STYLUS, 1}}).pressed == 2);
}

TEST_CASE("an absolute mouse without contact events always moves") {
    Pad mouse{PointerKind::absolute};
    (void)mouse.packet({{EV_ABS, ABS_X, 1000}, {EV_ABS, ABS_Y, 1000}});
    const auto moved = mouse.packet({{EV_ABS, ABS_X, 900}, {EV_KEY, BTN_LEFT, 1}});
    CHECK(moved.dx == -100);
    CHECK(moved.pressed == 1);
}

TEST_CASE("a relative pointer ignores places") {
    Pad mouse{PointerKind::mouse};
    (void)mouse.packet({{EV_ABS, ABS_X, 1000}});
    CHECK(mouse.packet({{EV_ABS, ABS_X, 900}}).dx == 0);
}
