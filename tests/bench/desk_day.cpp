#include "tests/bench/desk_day.hpp"

#include "estimator/hand/desk.hpp"
#include "tests/bench/child.hpp"

namespace sagitta::bench {

using namespace estimator;

namespace {

class Collector final : public MovementSink {
public:
    explicit Collector(DeskDays& into) : m_into{into} {}

    void on_movement(const Movement& movement) override {
        add(movement.press, movement);
        ++m_into.days.back().movements;
    }
    void on_exposure(const Exposure& exposure) override { add(exposure.time, exposure); }
    void on_press(PointerIndex pointer, PointerTime time, Button button) override {
        add(time, Press{pointer, time, button});
    }
    void on_wheel(PointerIndex pointer, PointerTime time, std::uint32_t steps) override {
        add(time, WheelTurn{pointer, time, steps});
    }

private:
    void add(PointerTime time, const Finding& finding) {
        const auto day = std::chrono::floor<std::chrono::days>(time.time_since_epoch());
        if (m_into.days.empty() || day > m_day) {
            m_day = day;
            m_into.days.emplace_back();
        }
        m_into.days.back().findings.push_back(finding);
    }

    DeskDays& m_into;
    std::chrono::days m_day{};
};

} // namespace

DeskDays simulate_days(int weeks) {
    DeskDays found;
    found.first_day = std::chrono::sys_days{std::chrono::days{20458}}; // 2026-01-05, a Monday
    const auto desk = hand::Desk::make(hand::map_room_desk(1, weeks, found.first_day));
    if (!desk) {
        give_up(desk.error().message);
    }
    Collector collector{found};
    Pipeline pipeline{Rules{}, collector};
    const auto pointers = (*desk)->pointers();
    found.pointers.assign(pointers.begin(), pointers.end());
    for (std::size_t i = 0; i < pointers.size(); ++i) {
        pipeline.set_pointer(
            static_cast<PointerIndex>(i),
            calibrate(pointers[i], std::nullopt, CpiSource::config, Gain::unity()));
    }
    ReportBatch batch;
    do {
        if (const auto read = (*desk)->next(batch); !read) {
            give_up(read.error().message);
        }
        pipeline.process(batch);
    } while (!batch.empty());
    pipeline.finish();
    return found;
}

void repeat(const Finding& finding, store::Recorder& recorder) {
    if (const auto* movement = std::get_if<Movement>(&finding)) {
        recorder.on_movement(*movement);
    } else if (const auto* exposure = std::get_if<Exposure>(&finding)) {
        recorder.on_exposure(*exposure);
    } else if (const auto* press = std::get_if<Press>(&finding)) {
        recorder.on_press(press->pointer, press->time, press->button);
    } else if (const auto* wheel = std::get_if<WheelTurn>(&finding)) {
        recorder.on_wheel(wheel->pointer, wheel->time, wheel->steps_120ths);
    }
}

PointerTime time_of(const Finding& finding) {
    if (const auto* movement = std::get_if<Movement>(&finding)) {
        return movement->press;
    }
    if (const auto* exposure = std::get_if<Exposure>(&finding)) {
        return exposure->time;
    }
    if (const auto* press = std::get_if<Press>(&finding)) {
        return press->time;
    }
    return std::get<WheelTurn>(finding).time;
}

} // namespace sagitta::bench
