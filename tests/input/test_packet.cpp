#include "fixtures.hpp"
#include "input/packet.hpp"

#include <doctest/doctest.h>
#include <limits>

using namespace sagitta;
using input::PacketAssembler;
using tests::event_at;
using tests::syn_at;
using Lines = std::vector<std::string>;

namespace {

constexpr estimator::PointerIndex k_pointer{3};

PacketAssembler mouse() {
    return PacketAssembler{k_pointer};
}

Lines assemble(PacketAssembler& assembler, const std::vector<input_event>& events) {
    estimator::ReportBatch batch;
    assembler.add(events, batch);
    return tests::as_text(batch);
}

Lines assemble(const std::vector<input_event>& events) {
    PacketAssembler assembler = mouse();
    return assemble(assembler, events);
}

std::vector<input_event> step_at(std::int64_t us, std::int32_t dx) {
    return {event_at(us, EV_REL, REL_X, dx), syn_at(us)};
}

std::vector<input_event> joined(std::initializer_list<std::vector<input_event>> parts) {
    std::vector<input_event> all;
    for (const auto& part : parts)
        all.insert(all.end(), part.begin(), part.end());
    return all;
}

} // namespace

TEST_CASE("a packet ends with SYN_REPORT and an absent axis means no motion") {
    CHECK(assemble({event_at(1000, EV_REL, REL_X, 3), event_at(1000, EV_REL, REL_Y, -1),
                    syn_at(1000), event_at(2000, EV_REL, REL_Y, 7), syn_at(2000)}) ==
          Lines{"1000 us pointer 3 moved 3 -1 wheel 0 pressed 0 released 0",
                "2000 us pointer 3 moved 0 7 wheel 0 pressed 0 released 0"});
}

TEST_CASE("a packet without motion, button or wheel makes no report") {
    CHECK(assemble({event_at(1000, EV_MSC, MSC_SCAN, 589825), syn_at(1000), syn_at(2000),
                    event_at(3000, EV_KEY, KEY_A, 1), syn_at(3000)})
              .empty());
}

TEST_CASE("every pointer button has its own bit, and a repeat is no press") {
    PacketAssembler assembler = mouse();
    estimator::ReportBatch batch;
    for (std::uint16_t code = BTN_LEFT; code <= BTN_TASK; ++code)
        assembler.add(std::vector{event_at(code, EV_KEY, code, 1), syn_at(code)}, batch);
    REQUIRE(batch.size() == 8);
    for (std::size_t i = 0; i < batch.size(); ++i)
        CHECK(batch[i].pressed == 1 << i);
    CHECK(assemble({event_at(1, EV_KEY, BTN_LEFT, 2), syn_at(1)}).empty());
    CHECK(assemble({event_at(1, EV_KEY, BTN_MIDDLE, 0), event_at(1, EV_KEY, BTN_RIGHT, 1),
                    syn_at(1)}) == Lines{"1 us pointer 3 moved 0 0 wheel 0 pressed 2 released 4"});
}

TEST_CASE("a wheel counts once when the kernel sends it coarse and fine") {
    CHECK(assemble({event_at(1, EV_REL, REL_WHEEL_HI_RES, -120), event_at(1, EV_REL, REL_WHEEL, -1),
                    syn_at(1)}) ==
          Lines{"1 us pointer 3 moved 0 0 wheel 120 pressed 0 released 0"});
    CHECK(assemble({event_at(1, EV_REL, REL_WHEEL, -2), syn_at(1)}) ==
          Lines{"1 us pointer 3 moved 0 0 wheel 240 pressed 0 released 0"});
    CHECK(assemble({event_at(1, EV_REL, REL_WHEEL_HI_RES, 30), event_at(1, EV_REL, REL_HWHEEL, -1),
                    syn_at(1)}) ==
          Lines{"1 us pointer 3 moved 0 0 wheel 150 pressed 0 released 0"});
}

TEST_CASE("a wheel beyond the range of a report saturates") {
    constexpr std::int32_t k_least = std::numeric_limits<std::int32_t>::min();
    CHECK(assemble({event_at(1, EV_REL, REL_WHEEL, k_least),
                    event_at(1, EV_REL, REL_HWHEEL_HI_RES, k_least), syn_at(1)}) ==
          Lines{"1 us pointer 3 moved 0 0 wheel 65535 pressed 0 released 0"});
}

// Source: Linux, Documentation/input/event-codes.rst: a client ignores all events up to and
// including the next SYN_REPORT after SYN_DROPPED.
TEST_CASE("after SYN_DROPPED all up to the next SYN_REPORT is ignored") {
    PacketAssembler assembler = mouse();
    CHECK(assemble(assembler, {event_at(1, EV_REL, REL_X, 5), event_at(2, EV_SYN, SYN_DROPPED, 0),
                               event_at(2, EV_REL, REL_X, 50), event_at(2, EV_KEY, BTN_LEFT, 1),
                               syn_at(2), event_at(3, EV_REL, REL_X, 7), syn_at(3),
                               event_at(4, EV_REL, REL_X, 8), syn_at(4)}) ==
          Lines{"3 us pointer 3 moved 7 0 wheel 0 pressed 0 released 0 lost",
                "4 us pointer 3 moved 8 0 wheel 0 pressed 0 released 0"});
    CHECK(assembler.drops() == 1);
}

TEST_CASE("a loss waits for the next report, over packets that make none") {
    CHECK(assemble({event_at(1, EV_SYN, SYN_DROPPED, 0), syn_at(1), syn_at(2), syn_at(3),
                    event_at(4, EV_KEY, BTN_LEFT, 0), syn_at(4)}) ==
          Lines{"4 us pointer 3 moved 0 0 wheel 0 pressed 0 released 1 lost"});
}

TEST_CASE("packets and drops may be cut anywhere between two reads") {
    const std::vector<input_event> events = joined(
        {step_at(1000, 4),
         {event_at(2000, EV_REL, REL_X, 1), event_at(2000, EV_SYN, SYN_DROPPED, 0),
          event_at(2000, EV_REL, REL_Y, 9), syn_at(2000), event_at(3000, EV_REL, REL_X, 2),
          event_at(3000, EV_REL, REL_WHEEL, 1), event_at(3000, EV_KEY, BTN_LEFT, 1), syn_at(3000)},
         step_at(4000, 6)});
    const Lines whole = assemble(events);
    CHECK(whole.size() == 3);
    for (std::size_t cut = 0; cut <= events.size(); ++cut) {
        PacketAssembler assembler = mouse();
        estimator::ReportBatch batch;
        assembler.add(std::span{events}.first(cut), batch);
        assembler.add(std::span{events}.subspan(cut), batch);
        CHECK(tests::as_text(batch) == whole);
        CHECK_FALSE(assembler.mid_packet());
    }
}

TEST_CASE("an open packet is known as such") {
    PacketAssembler assembler = mouse();
    CHECK_FALSE(assembler.mid_packet());
    (void)assemble(assembler, {event_at(1, EV_REL, REL_X, 1)});
    CHECK(assembler.mid_packet());
    CHECK(assemble(assembler, {syn_at(1)}).size() == 1);
    CHECK_FALSE(assembler.mid_packet());
}

TEST_CASE("a stamp that runs backwards is a loss, an equal one is not") {
    PacketAssembler assembler = mouse();
    CHECK(assemble(assembler, joined({step_at(5000, 1), step_at(5000, 2), step_at(3000, 3),
                                      step_at(4000, 4)})) ==
          Lines{"5000 us pointer 3 moved 1 0 wheel 0 pressed 0 released 0",
                "5000 us pointer 3 moved 2 0 wheel 0 pressed 0 released 0",
                "3000 us pointer 3 moved 3 0 wheel 0 pressed 0 released 0 lost",
                "4000 us pointer 3 moved 4 0 wheel 0 pressed 0 released 0"});
    CHECK(assembler.reversed_stamps() == 1);
}

TEST_CASE("a packet whose stamp is no time is ignored and is a loss") {
    PacketAssembler assembler = mouse();
    std::vector<input_event> broken = step_at(2000, 5);
    broken[1].input_event_usec = 1'000'000;
    std::vector<input_event> far = step_at(2000, 5);
    far[1].input_event_sec = std::numeric_limits<long>::max();
    std::vector<input_event> negative = step_at(2000, 5);
    negative[1].input_event_sec = -1;
    CHECK(
        assemble(assembler, joined({step_at(1000, 1), broken, far, negative, step_at(3000, 2)})) ==
        Lines{"1000 us pointer 3 moved 1 0 wheel 0 pressed 0 released 0",
              "3000 us pointer 3 moved 2 0 wheel 0 pressed 0 released 0 lost"});
    CHECK(assembler.reversed_stamps() == 3);
}

TEST_CASE("a delta that no pointer sends loses the packet's motion and keeps its buttons") {
    PacketAssembler assembler = mouse();
    CHECK(assemble(assembler,
                   {event_at(1, EV_REL, REL_X, 32767), event_at(1, EV_REL, REL_Y, -32767),
                    syn_at(1), event_at(2, EV_REL, REL_X, 32768), event_at(2, EV_REL, REL_Y, 4),
                    event_at(2, EV_KEY, BTN_LEFT, 1), syn_at(2),
                    event_at(3, EV_REL, REL_Y, std::numeric_limits<std::int32_t>::min()), syn_at(3),
                    event_at(4, EV_REL, REL_X, 1), syn_at(4)}) ==
          Lines{"1 us pointer 3 moved 32767 -32767 wheel 0 pressed 0 released 0",
                "2 us pointer 3 moved 0 0 wheel 0 pressed 1 released 0 lost",
                "4 us pointer 3 moved 1 0 wheel 0 pressed 0 released 0 lost"});
    CHECK(assembler.impossible_deltas() == 2);
}

TEST_CASE("an event lost on the way counts as a loss but not as a drop of the kernel") {
    PacketAssembler assembler = mouse();
    (void)assemble(assembler, step_at(1, 1));
    assembler.lose();
    CHECK(assemble(assembler, joined({step_at(2, 2), step_at(3, 3)})) ==
          Lines{"3 us pointer 3 moved 3 0 wheel 0 pressed 0 released 0 lost"});
    CHECK(assembler.drops() == 0);
}
