// bench_independence [MOVEMENTS [--all]]
//
// One continuous hand path, reported by many devices: 125 to 8000 reports/s, 400 to 6400 CPI, with
// real quantisation, polling jitter of up to one interval, late, doubled and merged reports, and
// coalescing to 60 reports/s as a stress case. The truth is the same measure on the continuous
// path. For every measure: the ratio of means, and the median and 95th percentile of the single
// movement's error, beside the naive figure (cumulative counts, first report to last, lengths
// along the reports). Exit 1 when a promise is broken.
#include "estimator/deviation.hpp"
#include "estimator/hand/device.hpp"
#include "estimator/pipeline.hpp"
#include "estimator/scorer.hpp"
#include "estimator/turns.hpp"

#include <algorithm>
#include <array>
#include <cmath>
#include <cstdint>
#include <cstdio>
#include <cstdlib>
#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

namespace {

using namespace sagitta::estimator;
namespace hand = sagitta::estimator::hand;

constexpr double k_px_per_mm = 1000.0 / k_mm_per_inch; // one px a count at 1000 CPI
constexpr PointerTime k_start{std::chrono::seconds{10}};
constexpr double k_reference_width_px = 20.0;

/// A measure, how it is averaged, and what is promised for the ratio of its means.
struct Measure {
    const char* name;
    std::function<double(const Scores&)> value;
    double promise;      ///< from 800 CPI up; 0 = none given
    double promise_slow; ///< at 400 CPI
};

double difficulty(const Scores& s) {
    return std::log2(s.distance.value() / k_reference_width_px + 1.0);
}

const std::vector<Measure>& measures() {
    static const std::vector<Measure> all{
        {"distance", [](const Scores& s) { return s.distance.value(); }, 0.01, 0.01},
        {"movement time", [](const Scores& s) { return seconds(s.movement_time); }, 0.01, 0.01},
        {"difficulty (ID)", difficulty, 0.01, 0.01},
        {"path length", [](const Scores& s) { return s.path.value(); }, 0.01, 0.01},
        {"peak speed", [](const Scores& s) { return s.peak_speed.value(); }, 0.01, 0.01},
        {"time to peak", [](const Scores& s) { return seconds(s.time_to_peak); }, 0.0, 0.0},
        {"dwell", [](const Scores& s) { return seconds(s.dwell); }, 0.0, 0.0},
        {"hand travel", [](const Scores& s) { return s.hand_travel.value(); }, 0.01, 0.01},
        {"ME", [](const Scores& s) { return s.error.value(); }, 0.01, 0.025},
        {"MO", [](const Scores& s) { return s.offset.value(); }, 0.01, 0.025},
        {"MV", [](const Scores& s) { return s.variability.value(); }, 0.01, 0.025},
        {"maximum", [](const Scores& s) { return s.max_deviation.value(); }, 0.01, 0.025},
        {"TAC", [](const Scores& s) { return double{1} * s.axis_crossings; }, 0.10, 0.10},
        {"MDC", [](const Scores& s) { return double{1} * s.direction_changes; }, 0.10, 0.10},
        {"ODC", [](const Scores& s) { return double{1} * s.orthogonal_changes; }, 0.10, 0.10},
        {"submovements", [](const Scores& s) { return double{1} * s.submovements; }, 0.10, 0.10},
        {"primary fraction", [](const Scores& s) { return s.primary_fraction; }, 0.0, 0.0},
        {"primary lateral", [](const Scores& s) { return std::abs(s.primary_lateral.value()); },
         0.0, 0.0},
        {"initial angle", [](const Scores& s) { return std::abs(s.initial_angle.value()); }, 0.0,
         0.0},
        {"SPARC", [](const Scores& s) { return -s.smoothness_sparc; }, 0.0, 0.0},
        {"LDLJ", [](const Scores& s) { return -s.smoothness_ldlj; }, 0.0, 0.0},
    };
    return all;
}

struct Task {
    hand::AimedPath path;
    Scores truth;      ///< the measures' own recipe on the continuous path
    Scores unfiltered; ///< the same without its low-pass, sampled at 2 kHz; some measures only
};

struct Setup {
    std::string name;
    hand::Electronics electronics;
    bool promised = true;
};

class FirstMovement final : public MovementSink {
public:
    void on_movement(const Movement& movement) override {
        found = movement.scores;
        ++count;
    }
    void on_exposure(const Exposure&) override {}
    void on_press(PointerIndex, PointerTime, Button) override {}
    void on_wheel(PointerIndex, PointerTime, std::uint32_t) override {}
    std::optional<Scores> found;
    int count = 0;
};

Calibration calibration_at(double cpi) {
    PointerDescription description;
    return calibrate(description, Cpi::of(cpi), CpiSource::config,
                     Gain::flat(1000.0 / cpi).value());
}

// ---- the truth -----------------------------------------------------------------------------

Scores truth_of(const hand::AimedPath& path, PathBuilder& builder, Scorer& scorer) {
    // Positions in counts of 1000 CPI, unrounded, on the grid that reconstruction uses.
    const double lead_s = 0.1;
    const auto size =
        static_cast<std::size_t>((path.motion_s() + 2.0 * lead_s) / k_sample_interval_s);
    std::vector<double> x(size);
    std::vector<double> y(size);
    for (std::size_t i = 0; i < size; ++i) {
        const auto at = path.position_at(static_cast<double>(i) * k_sample_interval_s - lead_s);
        x[i] = at.x_mm * k_px_per_mm;
        y[i] = -at.y_mm * k_px_per_mm;
    }
    const auto lead = Micros{static_cast<Micros::rep>(lead_s * 1e6)};
    const Path& built = builder.build(x, y, k_start - lead, calibration_at(1000.0));
    Scores scores = scorer.score(built, ScoreRules{});
    const auto press = k_start + Micros{std::llround(path.press_s() * 1e6)};
    scores.movement_time = press - built.start;
    scores.dwell = Micros{std::llround(path.dwell_s() * 1e6)};
    return scores;
}

Scores unfiltered_of(const hand::AimedPath& path) {
    constexpr double k_step_s = 0.0005;
    const auto size = static_cast<std::size_t>(path.motion_s() / k_step_s) + 1;
    std::vector<hand::Point> at(size);
    std::vector<double> speed(size, 0.0);
    for (std::size_t i = 0; i < size; ++i) {
        at[i] = path.position_at(static_cast<double>(i) * k_step_s);
    }
    double peak = 0.0;
    for (std::size_t i = 1; i + 1 < size; ++i) {
        speed[i] = std::hypot(at[i + 1].x_mm - at[i - 1].x_mm, at[i + 1].y_mm - at[i - 1].y_mm) /
                   (2.0 * k_step_s);
        peak = std::max(peak, speed[i]);
    }
    std::size_t first = 0;
    while (speed[first] < 0.1 * peak) {
        ++first;
    }
    std::size_t last = size - 1;
    while (speed[last] < 0.1 * peak) {
        --last;
    }
    const hand::Point end = path.end();
    const double distance = std::hypot(end.x_mm, end.y_mm);
    std::vector<double> across;
    double length = std::hypot(at[first].x_mm, at[first].y_mm) +
                    std::hypot(end.x_mm - at[last].x_mm, end.y_mm - at[last].y_mm);
    for (std::size_t i = first; i <= last; ++i) {
        across.push_back((at[i].y_mm * end.x_mm - at[i].x_mm * end.y_mm) / distance * k_px_per_mm);
        if (i > first) {
            length += std::hypot(at[i].x_mm - at[i - 1].x_mm, at[i].y_mm - at[i - 1].y_mm);
        }
    }
    Scores scores;
    const Deviation strayed = deviation(across);
    scores.distance = Pixels::of(distance * k_px_per_mm);
    scores.path = Pixels::of(length * k_px_per_mm);
    scores.movement_time =
        Micros{std::llround((path.press_s() - static_cast<double>(first) * k_step_s) * 1e6)};
    scores.peak_speed = MillimetresPerSecond::of(peak);
    scores.error = strayed.error;
    scores.offset = strayed.offset;
    scores.variability = strayed.variability;
    scores.max_deviation = strayed.max_deviation;
    return scores;
}

std::vector<Task> make_tasks(int count) {
    hand::Person person;
    person.bow = 0.12; // systematic, so that the mean offset is not a mean of nothing
    hand::Random random{7};
    PathBuilder builder;
    Scorer scorer;
    std::vector<Task> tasks;
    while (static_cast<int>(tasks.size()) < count) {
        const double share = random.uniform();
        const double distance_px = 30.0 * std::pow(1500.0 / 30.0, share);
        const hand::AimTask aim{Millimetres::of(distance_px / k_px_per_mm),
                                Degrees::of(360.0 * random.uniform()),
                                Millimetres::of(24.0 / k_px_per_mm)};
        Task task{hand::aim(person, hand::Form{}, aim, random), {}, {}};
        task.truth = truth_of(task.path, builder, scorer);
        // What the rules leave out is not a matter of the device.
        if (task.truth.distance.value() < 25.0 || seconds(task.truth.movement_time) > 3.8 ||
            task.path.dwell_s() > 0.9) {
            continue;
        }
        task.unfiltered = unfiltered_of(task.path);
        tasks.push_back(task);
    }
    return tasks;
}

// ---- naive figures -------------------------------------------------------------------------

/// The obvious method: cumulative counts as they come, from the first report to the last.
Scores naive(const std::vector<Report>& reports, double cpi) {
    const double px = 1000.0 / cpi;
    std::vector<double> x{0.0};
    std::vector<double> y{0.0};
    PointerTime first{};
    PointerTime press{};
    double length = 0.0;
    double peak = 0.0;
    PointerTime before{};
    for (const Report& report : reports) {
        if (report.pressed != 0) {
            press = report.time;
            break;
        }
        if (x.size() == 1) {
            first = report.time;
        }
        const double step = std::hypot(report.dx, report.dy) * px;
        const double dt = seconds(report.time - before);
        if (x.size() > 1 && dt > 0.0) {
            peak = std::max(peak, step / k_px_per_mm / dt);
        }
        before = report.time;
        length += step;
        x.push_back(x.back() + report.dx * px);
        y.push_back(y.back() - report.dy * px);
    }
    Scores scores;
    const double distance = std::hypot(x.back(), y.back());
    std::vector<double> along;
    std::vector<double> across;
    for (std::size_t i = 0; i < x.size(); ++i) {
        along.push_back((x[i] * x.back() + y[i] * y.back()) / distance);
        across.push_back((y[i] * x.back() - x[i] * y.back()) / distance);
    }
    const Deviation strayed = deviation(across);
    scores.distance = Pixels::of(distance);
    scores.movement_time = press - first;
    scores.path = Pixels::of(length);
    scores.peak_speed = MillimetresPerSecond::of(peak);
    scores.hand_travel = Millimetres::of(length / k_px_per_mm);
    scores.error = strayed.error;
    scores.offset = strayed.offset;
    scores.variability = strayed.variability;
    scores.max_deviation = strayed.max_deviation;
    scores.axis_crossings = axis_crossings(across, 0.0);
    scores.direction_changes = turning_points(across, 0.0);
    scores.orthogonal_changes = turning_points(along, 0.0);
    return scores;
}

// ---- one device ----------------------------------------------------------------------------

struct Row {
    std::string setup;
    bool promised;
    bool slow;
    double ratio;
    double ratio_se; ///< standard error, over movements
    double naive_ratio;
    double median;
    double p95;
};

struct DeviceResult {
    int split = 0; ///< movements that did not come out as exactly one
    std::vector<Scores> found;
    std::vector<Scores> naive;
    std::vector<const Task*> tasks;
};

DeviceResult run_device(const Setup& setup, const std::vector<Task>& tasks) {
    DeviceResult result;
    const double cpi = setup.electronics.cpi.value();
    std::uint64_t seed = 100;
    for (const Task& task : tasks) {
        hand::Device device{PointerIndex{0}, setup.electronics, ++seed};
        ReportBatch reports;
        device.move(task.path, k_start, reports);
        const auto press = k_start + Micros{std::llround(task.path.press_s() * 1e6)};
        device.press(std::max(press, device.last_stamp()), Button::left, reports);
        FirstMovement sink;
        Pipeline pipeline{Rules{}, sink};
        pipeline.set_pointer(PointerIndex{0}, calibration_at(cpi));
        pipeline.process(reports);
        pipeline.finish();
        if (sink.count != 1) {
            ++result.split;
            continue;
        }
        if (std::abs(sink.found->distance / task.truth.distance - 1.0) > 0.2) {
            ++result.split; // a piece of the movement
            continue;
        }
        result.found.push_back(*sink.found);
        result.naive.push_back(naive(reports, cpi));
        result.tasks.push_back(&task);
    }
    return result;
}

double quantile(std::vector<double> values, double p) {
    const auto at = static_cast<std::ptrdiff_t>(p * static_cast<double>(values.size() - 1));
    std::nth_element(values.begin(), values.begin() + at, values.end());
    return values[static_cast<std::size_t>(at)];
}

Row compare(const Measure& measure, const Setup& setup, const DeviceResult& result) {
    double found = 0.0;
    double plain = 0.0;
    double truth = 0.0;
    double squares = 0.0;
    std::vector<double> errors;
    for (std::size_t i = 0; i < result.found.size(); ++i) {
        const double true_value = measure.value(result.tasks[i]->truth);
        found += measure.value(result.found[i]);
        plain += measure.value(result.naive[i]);
        truth += true_value;
        squares += std::pow(measure.value(result.found[i]) - true_value, 2);
        errors.push_back(std::abs(measure.value(result.found[i]) - true_value) /
                         std::max(std::abs(true_value), 1e-9));
    }
    return {setup.name,
            setup.promised,
            setup.electronics.cpi.value() < 800.0,
            found / truth,
            std::sqrt(squares) / std::abs(truth),
            plain / truth,
            quantile(errors, 0.5),
            quantile(errors, 0.95)};
}

std::vector<Setup> make_setups() {
    std::vector<Setup> setups;
    for (const double rate : {125.0, 250.0, 500.0, 1000.0, 2000.0, 8000.0}) {
        for (const double cpi : {400.0, 800.0, 1600.0, 3200.0, 6400.0}) {
            hand::Electronics electronics;
            electronics.cpi = Cpi::of(cpi);
            electronics.reports_per_s = rate;
            electronics.jitter = 1.0;
            electronics.late_share = 0.005;
            electronics.doubled_share = 0.005;
            electronics.merged_share = 0.005;
            char name[64];
            std::snprintf(name, sizeof name, "%.0f/s %.0f CPI", rate, cpi);
            setups.push_back({name, electronics, cpi <= 3200.0});
        }
    }
    hand::Electronics coalesced;
    coalesced.reports_per_s = 1000.0;
    coalesced.coalesced_per_s = 60.0;
    setups.push_back({"60/s coalesced, 1000 CPI", coalesced, false});
    return setups;
}

// ---- tables --------------------------------------------------------------------------------

const Row& worst(const std::vector<Row>& rows, const std::function<bool(const Row&)>& wanted,
                 const std::function<double(const Row&)>& ratio) {
    const Row* found = nullptr;
    for (const Row& row : rows) {
        if (wanted(row) &&
            (found == nullptr || std::abs(ratio(row) - 1.0) > std::abs(ratio(*found) - 1.0))) {
            found = &row;
        }
    }
    return *found;
}

/// Beyond the promise by more than chance: two standard errors of the ratio itself.
bool breaks(const Row& row, double promise) {
    return std::abs(row.ratio - 1.0) > promise + 2.0 * row.ratio_se;
}

bool print_summary(const std::vector<std::vector<Row>>& table) {
    std::printf("%-16s %12s  %-14s %12s  %-14s %5s %7s %7s  %s\n", "measure", "800+ CPI",
                "worst at", "400 CPI", "worst at", "60/s", "median", "95th", "naive");
    bool kept = true;
    for (std::size_t m = 0; m < table.size(); ++m) {
        const Measure& measure = measures()[m];
        const auto ours = [](const Row& row) { return row.ratio; };
        const auto theirs = [](const Row& row) { return row.naive_ratio; };
        const auto fast = [](const Row& row) { return row.promised && !row.slow; };
        const auto slow = [](const Row& row) { return row.promised && row.slow; };
        const auto any = [](const Row& row) { return row.promised; };
        const Row& high = worst(table[m], fast, ours);
        const Row& low = worst(table[m], slow, ours);
        double median = 0.0;
        double p95 = 0.0;
        int counted = 0;
        for (const Row& row : table[m]) {
            if (row.promised) {
                median += row.median;
                p95 += row.p95;
                ++counted;
            }
        }
        const Row& plain = worst(table[m], any, theirs);
        const bool broken = measure.promise > 0.0 &&
                            (breaks(high, measure.promise) || breaks(low, measure.promise_slow));
        kept = kept && !broken;
        std::printf("%-16s %5.3f +-%.3f  %-14s %5.3f +-%.3f  %-14s %5.3f %6.2f%% %6.2f%%",
                    measure.name, high.ratio, high.ratio_se, high.setup.c_str(), low.ratio,
                    low.ratio_se, low.setup.c_str(), table[m].back().ratio,
                    100.0 * median / counted, 100.0 * p95 / counted);
        if (plain.naive_ratio > 0.0 && m < 15 && std::string_view{"time to peak"} != measure.name) {
            std::printf("  %7.3f", plain.naive_ratio);
        }
        std::printf("%s\n", broken ? "  BROKEN" : "");
    }
    return kept;
}

} // namespace

int main(int argc, char** argv) {
    const int count = argc > 1 ? std::atoi(argv[1]) : 1000;
    const bool all = argc > 2 && std::string_view{argv[2]} == "--all";
    if (count < 10) {
        std::fprintf(stderr, "usage: bench_independence [MOVEMENTS [--all]], 10 or more\n");
        return 2;
    }
    const std::vector<Task> tasks = make_tasks(count);
    const std::vector<Setup> setups = make_setups();
    std::vector<std::vector<Row>> table(measures().size());
    int split = 0;
    for (const Setup& setup : setups) {
        const DeviceResult result = run_device(setup, tasks);
        if (result.split > 0) {
            std::printf("%s: %d of %zu movements did not come out as one\n", setup.name.c_str(),
                        result.split, tasks.size());
            split += setup.promised ? result.split : 0;
        }
        for (std::size_t m = 0; m < measures().size(); ++m) {
            table[m].push_back(compare(measures()[m], setup, result));
        }
    }
    std::printf(
        "One hand, %d movements, %zu devices. Ratio of means to the truth on the "
        "continuous path; worst device.\nMedian and 95th percentile: error of the single "
        "movement, mean over devices of 400 to 3200 CPI.\nBROKEN: a promise is not kept.\n\n",
        count, setups.size());
    const bool kept = print_summary(table);
    if (all) {
        for (std::size_t m = 0; m < table.size(); ++m) {
            std::printf("\n%s\n", measures()[m].name);
            for (const Row& row : table[m]) {
                std::printf("  %-26s ratio %8.4f  naive %8.4f  median %7.2f%%  95th %7.2f%%\n",
                            row.setup.c_str(), row.ratio, row.naive_ratio, 100.0 * row.median,
                            100.0 * row.p95);
            }
        }
    }
    std::printf("\nWhat the recipe's own 10 Hz low-pass does to a measure (ratio of means, recipe "
                "to unfiltered path):\n");
    for (const std::size_t m : {0U, 1U, 3U, 4U, 8U, 9U, 10U, 11U}) {
        double with = 0.0;
        double without = 0.0;
        for (const Task& task : tasks) {
            with += measures()[m].value(task.truth);
            without += measures()[m].value(task.unfiltered);
        }
        std::printf("  %-16s %8.4f\n", measures()[m].name, with / without);
    }
    std::printf("\n%d movements of %zu fell apart over all promised devices.\n", split,
                tasks.size() * setups.size());
    return kept ? 0 : 1;
}
