// Any events, cut into reads of any length, make the same reports as in one piece.

#include "input/packet.hpp"

#include <cstdlib>
#include <cstring>
#include <vector>

namespace {

using sagitta::estimator::PointerIndex;
using sagitta::estimator::PointerKind;
using sagitta::estimator::Report;
using sagitta::estimator::ReportBatch;
using sagitta::input::PacketAssembler;

bool same(const Report& a, const Report& b) {
    return a.time == b.time && a.dx == b.dx && a.dy == b.dy && a.wheel_120ths == b.wheel_120ths &&
           a.pressed == b.pressed && a.released == b.released && a.pointer == b.pointer &&
           a.after_loss == b.after_loss;
}

bool same(const ReportBatch& a, const ReportBatch& b) {
    if (a.size() != b.size())
        return false;
    for (std::size_t i = 0; i < a.size(); ++i)
        if (!same(a[i], b[i]))
            return false;
    return true;
}

/// Stamps run backwards only where a report says so.
bool in_order(const ReportBatch& reports) {
    for (std::size_t i = 1; i < reports.size(); ++i)
        if (reports[i].time < reports[i - 1].time && !reports[i].after_loss)
            return false;
    return true;
}

void check(const std::vector<input_event>& events, PointerKind kind, std::size_t step) {
    PacketAssembler whole{PointerIndex{0}, kind};
    ReportBatch at_once;
    whole.add(events, at_once);
    PacketAssembler pieces{PointerIndex{0}, kind};
    ReportBatch bit_by_bit;
    for (std::size_t first = 0; first < events.size(); first += step)
        pieces.add(std::span{events}.subspan(first, std::min(step, events.size() - first)),
                   bit_by_bit);
    const bool same_counts = whole.drops() == pieces.drops() &&
                             whole.reversed_stamps() == pieces.reversed_stamps() &&
                             whole.impossible_deltas() == pieces.impossible_deltas() &&
                             whole.mid_packet() == pieces.mid_packet();
    if (!same(at_once, bit_by_bit) || !same_counts || !in_order(at_once))
        std::abort();
}

} // namespace

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
    if (size < 2)
        return 0;
    const auto kind = static_cast<PointerKind>(data[0] % 5);
    const std::size_t step = 1 + data[1] % 16;
    std::vector<input_event> events((size - 2) / sizeof(input_event));
    if (!events.empty())
        std::memcpy(events.data(), data + 2, events.size() * sizeof(input_event));
    check(events, kind, step);
    return 0;
}
