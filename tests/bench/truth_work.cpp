#include "truth_work.hpp"

#include "estimator/pipeline.hpp"

#include <cstdio>
#include <cstdlib>
#include <deque>
#include <utility>

namespace sagitta::bench {
namespace {

using namespace sagitta::estimator;

constexpr double k_px_per_mm = 1000.0 / k_mm_per_inch;

/// Sorts scored clicks into days and finds the truth of each by the time of its press.
class DayCollector final : public MovementSink {
public:
    DayCollector(const WorkPlan& plan, UtcTime begin) : m_plan{plan}, m_begin{begin} {
        worked.days.resize(static_cast<std::size_t>(plan.days));
    }

    void expect(std::vector<hand::AimedTruth> truths) {
        m_truths.insert(m_truths.end(), truths.begin(), truths.end());
    }
    void on_movement(const Movement& movement) override {
        if (movement.kind != MovementKind::click) {
            return;
        }
        const auto since = movement.press.time_since_epoch() - m_begin.time_since_epoch();
        const auto day = static_cast<std::size_t>(since / std::chrono::days{1});
        const auto known = find(movement.press);
        worked.days.at(day).add(movement.scores, known);
        ++worked.clicks;
        worked.known_clicks += known ? 1U : 0U;
    }
    void on_exposure(const Exposure&) override {}
    void on_press(PointerIndex, PointerTime, Button) override {}
    void on_wheel(PointerIndex, PointerTime, std::uint32_t) override {}

    Worked worked;

private:
    std::optional<KnownMovement> find(PointerTime press) {
        // A press is stamped late by as much as the last report is.
        constexpr Micros k_late = std::chrono::milliseconds{50};
        while (!m_truths.empty() && m_truths.front().press < press - k_late) {
            m_truths.pop_front();
        }
        if (m_truths.empty() || m_truths.front().press > press + k_late ||
            m_truths.front().kind != MovementKind::click) {
            return std::nullopt;
        }
        const hand::AimedTruth& truth = m_truths.front();
        const hand::AimTask task{Millimetres::of(truth.distance.value() / k_px_per_mm),
                                 Degrees::zero(),
                                 Millimetres::of(truth.width.value() / k_px_per_mm)};
        return KnownMovement{truth.distance.value(), truth.width.value(),
                             seconds(truth.press - truth.start),
                             hand::lawful_time_s(m_plan.person, m_plan.pointer.effect, task),
                             hand::lawful_time_s(m_plan.person, m_plan.other_effect, task)};
    }

    const WorkPlan& m_plan;
    UtcTime m_begin;
    std::deque<hand::AimedTruth> m_truths;
};

Rules rules_for(const WorkPlan& plan) {
    Rules rules;
    if (!plan.slow_presses) {
        rules.segmentation.max_movement_time = std::chrono::seconds{30};
    }
    return rules;
}

hand::DeskPlan desk_plan(const WorkPlan& plan) {
    hand::DeskPlan desk;
    desk.seed = plan.seed;
    desk.person = plan.person;
    desk.pointers = {plan.pointer};
    desk.days = plan.days;
    desk.weekends = true;
    desk.morning_end = desk.morning_start + plan.half_day;
    desk.afternoon_end = desk.afternoon_start + plan.half_day;
    desk.targets.width = plan.target_width;
    desk.activities.slow_press *= plan.slow_presses ? 1.0 : 0.0;
    desk.keep_truths = true;
    return desk;
}

} // namespace

hand::DeskPointer make_pointer(double cpi, double reports_per_s, const hand::Form& effect) {
    hand::DeskPointer pointer;
    pointer.electronics.cpi = Cpi::of(cpi);
    pointer.electronics.reports_per_s = reports_per_s;
    pointer.gain = 1000.0 / cpi;
    pointer.effect = effect;
    return pointer;
}

Worked work(const WorkPlan& plan) {
    auto desk = hand::Desk::make(desk_plan(plan));
    auto gain = Gain::flat(plan.pointer.gain);
    if (!desk || !gain) {
        std::fprintf(stderr, "bench_truth: %s\n",
                     (desk ? gain.error() : desk.error()).message.c_str());
        std::exit(1);
    }
    DayCollector collector{plan, (*desk)->begin()};
    Pipeline pipeline{rules_for(plan), collector};
    pipeline.set_pointer(PointerIndex{},
                         calibrate((*desk)->pointers()[0], std::nullopt, CpiSource::config, *gain));
    ReportBatch batch;
    while ((*desk)->next(batch) && !batch.empty()) {
        collector.expect((*desk)->take_truths());
        pipeline.process(batch);
    }
    pipeline.finish();
    return std::move(collector.worked);
}

} // namespace sagitta::bench
