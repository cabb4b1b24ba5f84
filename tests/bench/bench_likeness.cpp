// bench_likeness [HOURS_A_SESSION]
//
// Puts ten simulated people with four sessions each through the real pipeline, and prints their
// figures beside those of recorded everyday use. The recorded column was computed from open
// recordings of everyday work over remote desktop: 10 people, 28 sessions, 50 h.
#include "estimator/hand/desk.hpp"
#include "estimator/pipeline.hpp"
#include "estimator/regression.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <string>
#include <utility>
#include <vector>

namespace {

using namespace sagitta::estimator;

constexpr int k_people = 10;
constexpr int k_sessions = 4; // half-days of two days
constexpr double k_width_px = 20.0;
constexpr double k_least_error_px = 0.1;

struct Session {
    std::vector<double> distance, time, ratio, error; ///< px, s, 1, px
    std::vector<double> log_rate;                     ///< ln(ID / MT)
    double bits = 0.0;
    double seconds = 0.0;
};

/// What a person's days came to: one session a half-day.
struct Found {
    std::vector<Session> sessions;
    OutcomeCounts outcomes{};
    std::uint64_t presses = 0;
};

/// Collects scored clicks into sessions.
class Collector final : public MovementSink {
public:
    Collector(UtcTime begin, Micros afternoon) : m_begin{begin}, m_afternoon{afternoon} {
        found.sessions.resize(k_sessions);
    }

    void on_movement(const Movement& movement) override {
        if (movement.kind != MovementKind::click) {
            return;
        }
        const auto since = movement.press.time_since_epoch() - m_begin.time_since_epoch();
        const auto day = since / std::chrono::days{1};
        const bool afternoon = since % std::chrono::days{1} > m_afternoon;
        Session& session =
            found.sessions.at(static_cast<std::size_t>(2 * day + (afternoon ? 1 : 0)));
        const Scores& scores = movement.scores;
        const double bits = std::log2(scores.distance.value() / k_width_px + 1.0);
        const double time = seconds(scores.movement_time);
        session.distance.push_back(scores.distance.value());
        session.time.push_back(time);
        session.ratio.push_back(scores.path_ratio());
        session.error.push_back(std::max(scores.error.value(), k_least_error_px));
        session.log_rate.push_back(std::log(bits / time));
        session.bits += bits;
        session.seconds += time;
    }
    void on_exposure(const Exposure& exposure) override {
        ++found.outcomes[static_cast<std::size_t>(exposure.outcome)];
    }
    void on_press(PointerIndex, PointerTime, Button) override { ++found.presses; }
    void on_wheel(PointerIndex, PointerTime, std::uint32_t) override {}

    Found found;

private:
    UtcTime m_begin;
    Micros m_afternoon; ///< from the morning's begin
};

double quantile(std::vector<double> values, double p) {
    const auto place = static_cast<std::size_t>(p * static_cast<double>(values.size() - 1) + 0.5);
    std::nth_element(values.begin(), values.begin() + static_cast<std::ptrdiff_t>(place),
                     values.end());
    return values[place];
}

Moments moments_of(const std::vector<double>& values) {
    Moments moments;
    for (const double value : values) {
        moments.add(value);
    }
    return moments;
}

/// Spread of a quantity over movements within sessions and of its mean between a person's
/// sessions, the sampling error of the means taken off.
struct Spread {
    double within;
    double between;
};

Spread spread_of(const std::vector<std::vector<std::vector<double>>>& people) {
    double within = 0.0;
    double between = 0.0;
    double sampling = 0.0;
    double sessions = 0.0;
    for (const auto& person : people) {
        Moments means;
        for (const auto& session : person) {
            const Moments moments = moments_of(session);
            means.add(moments.mean);
            within += moments.variance();
            sampling += moments.variance() / static_cast<double>(moments.n);
            sessions += 1.0;
        }
        between += means.variance();
    }
    const auto count = static_cast<double>(people.size());
    return {std::sqrt(within / sessions),
            std::sqrt(std::max(0.0, between / count - sampling / sessions))};
}

Found simulate(std::uint64_t seed, Micros session_length) {
    hand::DeskPlan plan;
    plan.seed = seed;
    plan.person = hand::draw_person(hand::Person{}, seed);
    plan.pointers.resize(1);
    plan.days = k_sessions / 2;
    plan.morning_end = plan.morning_start + session_length;
    plan.afternoon_start = plan.morning_end + std::chrono::minutes{30};
    plan.afternoon_end = plan.afternoon_start + session_length;
    auto desk = hand::Desk::make(plan);
    if (!desk) {
        std::fprintf(stderr, "bench_likeness: %s\n", desk.error().message.c_str());
        std::exit(1);
    }
    Collector collector{(*desk)->begin(), session_length + std::chrono::minutes{20}};
    Pipeline pipeline{Rules{}, collector};
    pipeline.set_pointer(PointerIndex{}, calibrate((*desk)->pointers()[0], std::nullopt,
                                                   CpiSource::config, Gain::unity()));
    ReportBatch batch;
    while ((*desk)->next(batch) && !batch.empty()) {
        pipeline.process(batch);
    }
    pipeline.finish();
    return std::move(collector.found);
}

void print(const char* what, const std::string& simulated, const char* recorded) {
    std::printf("%-48s %18s   %s\n", what, simulated.c_str(), recorded);
}

std::string text(double value, int digits) {
    char buffer[32];
    std::snprintf(buffer, sizeof buffer, "%.*f", digits, value);
    return buffer;
}

} // namespace

int main(int argc, char** argv) {
    const double hours = argc > 1 ? std::atof(argv[1]) : 2.0;
    if (!(hours > 0.2 && hours <= 7.0)) {
        std::fprintf(stderr, "usage: bench_likeness [HOURS_A_SESSION], 0.2 to 7\n");
        return 2;
    }
    const Micros length{static_cast<Micros::rep>(hours * 3.6e9)};

    Session all;
    std::vector<double> throughput, slopes;
    std::vector<std::vector<std::vector<double>>> rates, errors;
    std::uint64_t presses = 0;
    OutcomeCounts outcomes{};
    for (int person = 1; person <= k_people; ++person) {
        const Found found = simulate(static_cast<std::uint64_t>(person), length);
        presses += found.presses;
        for (std::size_t i = 0; i < k_outcomes; ++i) {
            outcomes[i] += found.outcomes[i];
        }
        PairMoments of_person;
        Session sum;
        rates.emplace_back();
        for (const Session& session : found.sessions) {
            rates.back().push_back(session.log_rate);
            sum.bits += session.bits;
            sum.seconds += session.seconds;
            for (std::size_t i = 0; i < session.distance.size(); ++i) {
                all.distance.push_back(session.distance[i]);
                all.time.push_back(session.time[i]);
                all.ratio.push_back(session.ratio[i]);
                all.error.push_back(session.error[i]);
                of_person.add(std::log(session.distance[i]), std::log(session.error[i]));
            }
        }
        throughput.push_back(sum.bits / sum.seconds);
        const auto line = fit_line(of_person);
        if (!line) {
            std::fprintf(stderr, "bench_likeness: too few movements\n");
            return 1;
        }
        slopes.push_back(line->slope);
        errors.emplace_back();
        for (const Session& session : found.sessions) {
            errors.back().emplace_back();
            for (std::size_t i = 0; i < session.distance.size(); ++i) {
                errors.back().back().push_back(std::log(session.error[i]) - line->intercept -
                                               line->slope * std::log(session.distance[i]));
            }
        }
    }

    const Spread rate = spread_of(rates);
    const Spread error = spread_of(errors);
    std::printf("%zu scored clicks of %llu presses, %d people, %d sessions\n\n",
                all.distance.size(), static_cast<unsigned long long>(presses), k_people,
                k_people * k_sessions);
    print("figure", "simulated", "recorded");
    print("median distance, px", text(quantile(all.distance, 0.5), 0), "194");
    print("median movement time, s", text(quantile(all.time, 0.5), 2), "0.91");
    print("median path ratio L/D", text(quantile(all.ratio, 0.5), 3), "1.14");
    print("median movement error ME, px", text(quantile(all.error, 0.5), 1), "8.7");
    print("share of presses scored, %",
          text(100.0 * static_cast<double>(all.distance.size()) / static_cast<double>(presses), 0),
          "59");
    print("implied throughput at W = 20 px, bit/s",
          text(quantile(throughput, 0.5), 2) + " [" + text(quantile(throughput, 0.25), 1) + "-" +
              text(quantile(throughput, 0.75), 1) + "]",
          "3.15 [3.0-3.5]");
    print("SD of log(ID/MT) within a session", text(rate.within, 2), "0.47 (0.37-0.49)");
    print("SD of its mean between sessions", text(rate.between, 3), "0.049 (0.024-0.075)");
    print("SD of log ME given log D within a session", text(error.within, 2), "1.1");
    print("SD of its mean between sessions", text(error.between, 2), "0.14 (0.08-0.17)");
    print("slope of log ME on log D, lowest to highest person",
          text(quantile(slopes, 0.0), 2) + "-" + text(quantile(slopes, 1.0), 2), "0.57-0.88");
    std::printf("\nwhat became of runs and presses\n");
    for (std::size_t i = 0; i < k_outcomes; ++i) {
        std::printf("  %-28s %8llu\n", std::string{to_text(static_cast<Outcome>(i))}.c_str(),
                    static_cast<unsigned long long>(outcomes[i]));
    }
    return 0;
}
