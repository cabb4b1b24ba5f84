#include "estimator/hand/desk.hpp"

#include "estimator/hand/work.hpp"

#include <algorithm>
#include <cmath>
#include <optional>
#include <string>
#include <utility>

namespace sagitta::estimator::hand {

namespace {

constexpr std::size_t k_fill = 4096; // reports generated before a batch is handed out
constexpr double k_latest_start_s = 600.0;
constexpr double k_longest_pause_s = 900.0;
constexpr double k_work_day_s = 8.0 * 3600.0;

bool is_weekend(std::chrono::sys_days day) {
    const std::chrono::weekday weekday{day};
    return weekday == std::chrono::Saturday || weekday == std::chrono::Sunday;
}

Micros micros(double duration_s) {
    return Micros{std::llround(duration_s * 1e6)};
}

bool positive(double value) {
    return std::isfinite(value) && value > 0.0;
}

Result<void> check_pointer(const DeskPointer& pointer, const std::string& where) {
    if (!positive(pointer.electronics.cpi.value()) ||
        !positive(pointer.electronics.reports_per_s) || !positive(pointer.gain)) {
        return fail(ErrorCode::bad_value,
                    where + ": CPI, report rate and gain must all be above 0");
    }
    if (!positive(pointer.effect.performance) || !positive(pointer.effect.lateral) ||
        !positive(pointer.effect.time)) {
        return fail(ErrorCode::bad_value, where + ": the factors of its effect must be above 0");
    }
    return {};
}

Result<void> check(const DeskPlan& plan) {
    if (plan.pointers.empty() || plan.pointers.size() > k_max_pointers) {
        return fail(ErrorCode::bad_value, "a simulated desk needs 1 to 256 pointers");
    }
    for (std::size_t i = 0; i < plan.pointers.size(); ++i) {
        const auto checked =
            check_pointer(plan.pointers[i], "simulated pointer " + std::to_string(i + 1));
        if (!checked) {
            return checked;
        }
    }
    for (const PointerIndex index : plan.half_days) {
        if (static_cast<std::size_t>(index) >= plan.pointers.size()) {
            return fail(ErrorCode::bad_value,
                        "the simulated desk's schedule names a pointer it does not have");
        }
    }
    const bool ordered = Micros{0} <= plan.morning_start && plan.morning_start < plan.morning_end &&
                         plan.morning_end <= plan.afternoon_start &&
                         plan.afternoon_start < plan.afternoon_end &&
                         plan.afternoon_end <= std::chrono::hours{24};
    if (!ordered || plan.days < 0) {
        return fail(ErrorCode::bad_value,
                    "the simulated desk's hours must follow each other within a day");
    }
    if (!positive(plan.targets.distance.value()) || !positive(plan.targets.width.value()) ||
        !positive(plan.course.practice_days)) {
        return fail(ErrorCode::bad_value, "the simulated desk's target distance, target width and "
                                          "days of practice must be above 0");
    }
    if (!positive(plan.person.index_of_performance.value())) {
        return fail(ErrorCode::bad_value,
                    "the simulated person's index of performance must be above 0 bit/s");
    }
    return {};
}

/// The hours of one pointer in one half of a working day.
struct Session {
    PointerIndex pointer;
    PointerTime day_start; ///< of the morning, for fatigue
    PointerTime end;
    Form form; ///< of the session, effect and practice included
    Work work;
};

} // namespace

struct Desk::State {
    DeskPlan plan;
    std::vector<PointerDescription> descriptions;
    std::vector<Device> devices;
    std::vector<int> half_days_used; ///< by pointer

    int day = 0;           ///< calendar days gone by
    int half = 0;          ///< half of that day that comes next
    std::size_t index = 0; ///< working half-days gone by
    double day_factor = 1.0;
    std::optional<Session> session;
    Random pauses{0};
    PointerTime now{};

    ReportBatch pending;
    std::size_t handed_out = 0;
    std::vector<AimedTruth> truths;

    [[nodiscard]] PointerTime local(int on_day, Micros time_of_day) const {
        const auto midnight = plan.first_day + std::chrono::days{on_day};
        return PointerTime{Micros{midnight.time_since_epoch()} + time_of_day - plan.utc_offset};
    }

    [[nodiscard]] bool open_session();
    [[nodiscard]] Form form_now() const;
    void fill();
};

bool Desk::State::open_session() {
    session.reset();
    while (day < plan.days && half == 0 && !plan.weekends &&
           is_weekend(plan.first_day + std::chrono::days{day})) {
        ++day;
    }
    if (day >= plan.days) {
        return false;
    }
    const bool morning = half == 0;
    const PointerIndex pointer =
        plan.half_days.empty() ? PointerIndex{} : plan.half_days[index % plan.half_days.size()];
    const auto place = static_cast<std::size_t>(pointer);
    // Each half-day draws from streams of its own: one does not depend on what came before.
    Random random{plan.seed, 2 * index};
    pauses = Random{plan.seed, 2 * index + 1};
    if (morning) {
        day_factor = random.log_normal(1.0, plan.course.day_noise);
    }
    const Form& effect = plan.pointers[place].effect;
    Form form = draw_form(plan.person, random);
    form.performance *= effect.performance;
    form.lateral *= effect.lateral;
    const double days_used = half_days_used[place] / 2.0;
    form.time *= effect.time * day_factor *
                 std::exp(plan.course.practice * std::exp(-days_used / plan.course.practice_days));

    const Micros begin = morning ? plan.morning_start : plan.afternoon_start;
    const Micros end = morning ? plan.morning_end : plan.afternoon_end;
    now = std::max(now, local(day, begin) + micros(random.uniform(0.0, k_latest_start_s)));
    const auto work_seed = static_cast<std::uint64_t>(random.uniform() * 0x1p53);
    session.emplace(Session{
        pointer, local(day, plan.morning_start), local(day, end), form,
        Work{plan, pointer, devices[place], work_seed, plan.keep_truths ? &truths : nullptr}});
    ++half_days_used[place];
    ++index;
    half = morning ? 1 : 0;
    day += morning ? 0 : 1;
    return true;
}

Form Desk::State::form_now() const {
    Form form = session->form;
    const double worked_s = seconds(now - session->day_start);
    form.time *= std::exp(plan.course.fatigue * worked_s / k_work_day_s);
    return form;
}

void Desk::State::fill() {
    while (pending.size() < k_fill) {
        if ((!session || now >= session->end) && !open_session()) {
            return;
        }
        const Work::Done done = session->work.perform(now, form_now(), pending);
        const Device& device = devices[static_cast<std::size_t>(session->pointer)];
        now = std::max(done.end, device.last_stamp());
        if (done.pauses) {
            now += micros(std::min(pauses.log_normal(seconds(plan.reading), plan.reading_spread),
                                   k_longest_pause_s));
        }
    }
}

Result<std::unique_ptr<Desk>> Desk::make(DeskPlan plan) {
    const auto checked = check(plan);
    if (!checked) {
        return tl::unexpected<Error>{checked.error()};
    }
    auto state = std::make_unique<State>();
    state->plan = std::move(plan);
    const DeskPlan& kept = state->plan;
    for (std::size_t i = 0; i < kept.pointers.size(); ++i) {
        const DeskPointer& pointer = kept.pointers[i];
        PointerDescription description = pointer.description;
        description.origin = Origin::simulated;
        description.udev_cpi = pointer.electronics.cpi;
        state->descriptions.push_back(std::move(description));
        state->devices.emplace_back(static_cast<PointerIndex>(i), pointer.electronics,
                                    kept.seed + 7919 * (i + 1));
    }
    state->half_days_used.assign(kept.pointers.size(), 0);
    state->now = state->local(0, kept.morning_start);
    return std::unique_ptr<Desk>{new Desk{std::move(state)}};
}

Desk::Desk(std::unique_ptr<State> state) : m_state{std::move(state)} {}
Desk::~Desk() = default;

Result<void> Desk::next(ReportBatch& batch) {
    State& state = *m_state;
    batch.clear();
    if (state.handed_out == state.pending.size()) {
        state.pending.clear();
        state.handed_out = 0;
        state.fill();
    }
    if (state.handed_out == 0 && state.pending.size() <= k_max_batch) {
        batch.swap(state.pending); // the usual case: no copy
        return {};
    }
    const auto first = state.pending.begin() + static_cast<std::ptrdiff_t>(state.handed_out);
    const std::size_t count = std::min(state.pending.size() - state.handed_out, k_max_batch);
    batch.assign(first, first + static_cast<std::ptrdiff_t>(count));
    state.handed_out += count;
    return {};
}

std::span<const PointerDescription> Desk::pointers() const {
    return m_state->descriptions;
}

std::vector<AimedTruth> Desk::take_truths() {
    return std::exchange(m_state->truths, {});
}

UtcTime Desk::now() const {
    return UtcTime{m_state->now.time_since_epoch()};
}

UtcTime Desk::begin() const {
    return UtcTime{m_state->local(0, m_state->plan.morning_start).time_since_epoch()};
}

UtcTime Desk::end() const {
    const State& state = *m_state;
    return UtcTime{
        state.local(std::max(0, state.plan.days - 1), state.plan.afternoon_end).time_since_epoch()};
}

const DeskPlan& Desk::plan() const {
    return m_state->plan;
}

} // namespace sagitta::estimator::hand
