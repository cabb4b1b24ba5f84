// bench_truth [PEOPLE [MINUTES_A_HALF_DAY]] [--no-slow]
//
// How well each measure recovers what it claims. Seeded people, whose way of pointing is known, do
// days of everyday work through the real pipeline. The first table holds each measure against what
// is known of the people; the second compares two devices whose difference is known, while the
// work changes between them or the reference width does. --no-slow: without presses that take long
// and without the limit on movement time, to see what these do. Exit 1 when the truths cannot be
// found in the scored movements, or when the headline's interval covers too little.
#include "estimator/interval.hpp"
#include "truth_measures.hpp"
#include "truth_statistics.hpp"
#include "truth_work.hpp"

#include <algorithm>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <functional>
#include <string>
#include <string_view>

namespace {

using namespace sagitta::bench;
using sagitta::estimator::Micros;
using sagitta::estimator::Moments;
using sagitta::estimator::Pixels;
namespace estimator = sagitta::estimator;
namespace hand = sagitta::estimator::hand;

constexpr double k_confidence = 0.95;
constexpr std::size_t k_parts = 3;
constexpr std::size_t k_part_days = 5;
constexpr int k_compared_days = 10;
/// The device that is compared with the person's own: a tenth fewer bits per second, a quarter
/// more lateral noise.
constexpr hand::Form k_other_effect{0.9, 1.25, 1.0};

struct Scale {
    int people = 96;
    Micros half_day = std::chrono::minutes{20};
    bool slow_presses = true;
};

/// Clicks over the whole run.
struct Counts {
    std::uint64_t clicks = 0;
    std::uint64_t known = 0;
    std::uint64_t days = 0;

    std::vector<Sums> take(Worked worked) {
        clicks += worked.clicks;
        known += worked.known_clicks;
        days += worked.days.size();
        return std::move(worked.days);
    }
};

// ---- people --------------------------------------------------------------------------------

/// A person's days with one device and kind of work, dealt into parts in turn, and five days with
/// a device and work of their own.
struct Studied {
    hand::Person person;
    std::vector<std::vector<Sums>> parts;
    std::vector<Sums> own_work;
    hand::Form own_effect;
};

Studied make_studied(std::uint64_t seed, const Scale& scale, Counts& counts) {
    static const std::array<double, 3> widths{24.0, 34.0, 48.0};
    static const std::array<hand::DeskPointer, 4> pointers{
        make_pointer(400.0, 125.0), make_pointer(800.0, 500.0, k_other_effect),
        make_pointer(1600.0, 1000.0, {1.1, 0.9, 1.0}), make_pointer(3200.0, 125.0)};
    Studied studied;
    studied.person = hand::draw_person(hand::Person{}, seed);
    WorkPlan plan;
    plan.seed = seed;
    plan.person = studied.person;
    plan.pointer = make_pointer(1000.0, 125.0);
    plan.days = static_cast<int>(k_parts * k_part_days);
    plan.half_day = scale.half_day;
    plan.slow_presses = scale.slow_presses;
    const std::vector<Sums> days = counts.take(work(plan));
    studied.parts.resize(k_parts);
    for (std::size_t i = 0; i < days.size(); ++i) {
        studied.parts[i % k_parts].push_back(days[i]);
    }
    hand::Random random{seed, 0xdea1U};
    plan.seed = seed + 1'000'000;
    plan.pointer = pointers.at(random.below(pointers.size()));
    plan.target_width = Pixels::of(widths.at(random.below(widths.size())));
    plan.days = static_cast<int>(k_part_days);
    studied.own_work = counts.take(work(plan));
    studied.own_effect = plan.pointer.effect;
    return studied;
}

struct PeopleRow {
    double bias = 0.0; ///< share
    double speed_r = 0.0, speed_rank = 0.0;
    double claim_r = 0.0;
    double own_rank = 0.0;     ///< with its claim, over people with their own devices and work
    double halves = 0.0;       ///< correlation of one part with another
    double covered = 0.0;      ///< share
    Known most = Known::speed; ///< the known figure that it follows most, either way
    double most_r = 0.0;
};

/// Whether the t interval of a part's days covers what the other parts' days come to. These are
/// not for ever: the share of the difference that their own sampling makes is taken off, which is
/// exact for independent normal days.
bool covers(const Measure& measure, const Studied& studied, std::size_t part) {
    std::vector<Sums> rest;
    for (std::size_t other = 0; other < k_parts; ++other) {
        if (other != part) {
            rest.insert(rest.end(), studied.parts[other].begin(), studied.parts[other].end());
        }
    }
    const auto values = measure.by_day(studied.parts[part]);
    const auto interval = estimator::mean_interval(values, k_confidence);
    if (!interval) {
        return false;
    }
    const double ratio = static_cast<double>(values.size()) / static_cast<double>(rest.size());
    const double off = (interval->estimate - measure.of(rest)) / std::sqrt(1.0 + ratio);
    return std::abs(off) <= interval->high - interval->estimate;
}

double bias_of(const Measure& measure, const std::vector<Studied>& people) {
    if (!measure.known) {
        return std::nan("");
    }
    Moments bias;
    for (const Studied& studied : people) {
        for (const std::vector<Sums>& part : studied.parts) {
            const double truth = measure.known(merged(part), Slopes::of(part), studied.person);
            bias.add(measure.of(part) / truth - 1.0);
        }
    }
    return bias.mean;
}

/// The truths of one kind, a person each.
std::vector<double> truths_of(Known known, const std::vector<Studied>& people, bool own_work) {
    std::vector<double> truths;
    truths.reserve(people.size());
    for (const Studied& studied : people) {
        truths.push_back(
            truth_of(known, studied.person, own_work ? studied.own_effect : hand::Form{}));
    }
    return truths;
}

PeopleRow compare_people(const Measure& measure, const std::vector<Studied>& people) {
    std::vector<double> own_value;
    std::array<std::vector<double>, k_parts> values;
    double covered = 0.0;
    for (const Studied& studied : people) {
        own_value.push_back(measure.of(studied.own_work));
        for (std::size_t part = 0; part < k_parts; ++part) {
            values[part].push_back(measure.of(studied.parts[part]));
            covered += covers(measure, studied, part) ? 1.0 : 0.0;
        }
    }
    const auto over_parts = [&values](const auto& figure) {
        double sum = 0.0;
        for (const std::vector<double>& part : values) {
            sum += figure(part);
        }
        return sum / k_parts;
    };
    PeopleRow row;
    row.bias = bias_of(measure, people);
    row.covered = covered / static_cast<double>(k_parts * people.size());
    for (std::size_t i = 0; i < k_known; ++i) {
        const auto known = static_cast<Known>(i);
        const std::vector<double> truth = truths_of(known, people, false);
        const double r = over_parts([&](const auto& part) { return correlation(part, truth); });
        if (std::abs(r) > std::abs(row.most_r)) {
            row.most = known;
            row.most_r = r;
        }
        if (known == Known::speed) {
            row.speed_r = measure.speed_sign * r;
            row.speed_rank = measure.speed_sign * over_parts([&](const auto& part) {
                                 return rank_correlation(part, truth);
                             });
        }
        if (known == measure.claim) {
            row.claim_r = measure.claim_sign * r;
        }
    }
    row.own_rank =
        measure.claim_sign * rank_correlation(own_value, truths_of(measure.claim, people, true));
    for (std::size_t part = 0; part < k_parts; ++part) {
        row.halves += correlation(values[part], values[(part + 1) % k_parts]) / k_parts;
    }
    return row;
}

double coverage_error(double trials) {
    return std::sqrt(k_confidence * (1.0 - k_confidence) / trials);
}

/// Nothing for a figure that is not there.
std::string text(double value, int digits) {
    std::array<char, 32> buffer{};
    if (!std::isnan(value)) {
        std::snprintf(buffer.data(), buffer.size(), "%+.*f", digits, value);
    }
    return buffer.data();
}

void print_people_head(std::size_t people) {
    std::printf(
        "%zu people, one device, one kind of work: what %zu days tell of the person. bias: of the "
        "level, where\nthe truth has the same unit. speed: correlation r and rank correlation rho "
        "over people with the known\nindex of performance, + = the way a stand-in for it should "
        "go. claim: r with what the measure is meant to\nfollow. own: its rho when each person "
        "has a device and a kind of work of their own. half: r of one %zu days\nwith another. "
        "covers: %% of 95 %% intervals over %zu days that hold the person's long-run value. most: "
        "the\nknown figure that it follows most.\n\n",
        people, k_part_days, k_part_days, k_part_days);
    std::printf("%-29s %6s %6s %6s %-7s %6s %6s %6s %6s  %-9s %5s\n", "measure", "bias", "speed",
                "speed", "claim", "claim", "own", "half", "covers", "most", "most");
    std::printf("%-29s %6s %6s %6s %-7s %6s %6s %6s %6s  %-9s %5s\n", "", "%", "r", "rho", "", "r",
                "rho", "r", "%", "", "r");
}

/// The names of the measures that are so.
void print_those(const char* what, const std::vector<PeopleRow>& rows,
                 const std::function<bool(const Measure&, const PeopleRow&)>& is_so) {
    std::string line = std::string{what} + ":";
    const char* separator = " ";
    constexpr std::size_t k_columns = 104;
    std::size_t line_start = 0;
    for (std::size_t m = 0; m < rows.size(); ++m) {
        if (!is_so(measures()[m], rows[m])) {
            continue;
        }
        std::string name = measures()[m].name;
        name.erase(0, name.find_first_not_of(' '));
        line += separator;
        if (line.size() - line_start + name.size() > k_columns) {
            line.back() = '\n';
            line_start = line.size();
            line += "  ";
        }
        line += name;
        separator = "; ";
    }
    std::printf("%s%s.\n", line.c_str(), *separator == ' ' ? " none" : "");
}

void print_people_words(const std::vector<PeopleRow>& rows, double interval_error) {
    std::printf("\nIn words:\n");
    print_those("- These rank people by speed (r 0.7 or more)", rows,
                [](const Measure&, const PeopleRow& row) { return row.speed_r >= 0.7; });
    print_those("- These do not rank people by speed (r below 0.3)", rows,
                [](const Measure&, const PeopleRow& row) { return row.speed_r < 0.3; });
    print_those(
        "- These follow something else more than what they are meant to follow", rows,
        [](const Measure& measure, const PeopleRow& row) { return row.most != measure.claim; });
    print_those("- Five days of so few clicks do not settle these (half below 0.6)", rows,
                [](const Measure&, const PeopleRow& row) { return row.halves < 0.6; });
    print_those("- The intervals of these hold less than they say", rows,
                [interval_error](const Measure&, const PeopleRow& row) {
                    return row.covered < k_confidence - 3.0 * interval_error;
                });
}

bool print_people(const std::vector<Studied>& people) {
    print_people_head(people.size());
    std::vector<PeopleRow> rows;
    for (const Measure& measure : measures()) {
        const PeopleRow row = compare_people(measure, people);
        std::printf("%-29s %6s %6.2f %6.2f %-7s %6.2f %6.2f %6.2f %6.1f  %-9s %5.2f\n",
                    measure.name, text(100.0 * row.bias, 1).c_str(), row.speed_r, row.speed_rank,
                    to_text(measure.claim), row.claim_r, row.own_rank, row.halves,
                    100.0 * row.covered, to_text(row.most), row.most_r);
        rows.push_back(row);
    }
    const double interval_error = coverage_error(static_cast<double>(k_parts * people.size()));
    print_people_words(rows, interval_error);
    const double root = std::sqrt(static_cast<double>(people.size()));
    std::printf("\nStandard errors: an r near 0 %.2f, near 0.8 %.2f; covers %.1f. In this hand all "
                "known figures are drawn\napart from each other, so that an r near 0 of a path "
                "measure with speed is put in, not found.\n",
                1.0 / root, (1.0 - 0.8 * 0.8) / root, 100.0 * interval_error);
    return rows[k_headline].covered >= k_confidence - 3.0 * interval_error;
}

// ---- two devices ---------------------------------------------------------------------------

/// One side of the comparison with the person's own device.
struct Arm {
    const char* name;
    hand::DeskPointer pointer;
    double width_px;
};

const std::vector<Arm>& arms() {
    static const std::vector<Arm> all{
        {"same", make_pointer(800.0, 500.0, k_other_effect), 34.0},
        {"24 px", make_pointer(800.0, 500.0, k_other_effect), 24.0},
        {"48 px", make_pointer(800.0, 500.0, k_other_effect), 48.0},
        {"electr.", make_pointer(400.0, 1000.0), 34.0},
    };
    return all;
}

struct Compared {
    std::vector<Sums> own;
    std::vector<std::vector<Sums>> others; ///< by arm
};

Compared make_compared(std::uint64_t seed, const Scale& scale, Counts& counts) {
    WorkPlan plan;
    plan.seed = 2'000'000 + 10 * seed;
    plan.person = hand::draw_person(hand::Person{}, 5000 + seed);
    plan.pointer = make_pointer(1000.0, 125.0);
    plan.other_effect = k_other_effect;
    plan.days = k_compared_days;
    plan.half_day = scale.half_day;
    plan.slow_presses = scale.slow_presses;
    Compared compared;
    compared.own = counts.take(work(plan));
    for (const Arm& arm : arms()) {
        ++plan.seed;
        plan.pointer = arm.pointer;
        plan.target_width = Pixels::of(arm.width_px);
        compared.others.push_back(counts.take(work(plan)));
    }
    return compared;
}

/// Log of the ratio that the other device's effect makes on the same targets.
double known_log_ratio(KnownChange change, std::span<const Sums> own) {
    const Sums all = merged(own);
    const auto lawful = [](const estimator::PairMoments& moments) {
        return std::log(at_standard_distance(moments, slope_of(moments)));
    };
    switch (change) {
    case KnownChange::throughput:
        return std::log(all.lawful_seconds / all.other_lawful_seconds);
    case KnownChange::slope:
        return std::log(k_other_effect.performance);
    case KnownChange::time:
        return lawful(all.log_distance_other_lawful) - lawful(all.log_distance_lawful);
    case KnownChange::noise:
        return std::log(k_other_effect.lateral);
    case KnownChange::none:
        break;
    }
    return std::nan("");
}

std::vector<double> logs(std::vector<double> values) {
    std::transform(values.begin(), values.end(), values.begin(),
                   [](double value) { return std::log(value); });
    return values;
}

double percent(double log_ratio) {
    return 100.0 * std::expm1(log_ratio);
}

void print_change(const Measure& measure, const std::vector<Compared>& people) {
    Moments truth;
    std::vector<Moments> found(arms().size());
    std::vector<double> covered(arms().size(), 0.0);
    for (const Compared& compared : people) {
        const double known = known_log_ratio(measure.change, compared.own);
        truth.add(known);
        const double own = std::log(measure.of(compared.own));
        const auto own_days = logs(measure.by_day(compared.own));
        for (std::size_t arm = 0; arm < arms().size(); ++arm) {
            found[arm].add(std::log(measure.of(compared.others[arm])) - own);
            // A day whose figure has no logarithm leaves no interval, which covers nothing.
            const auto interval = estimator::difference_interval(
                logs(measure.by_day(compared.others[arm])), own_days, k_confidence);
            const double expected = arm + 1 == arms().size() ? 0.0 : known;
            const bool held = interval && interval->low <= expected && expected <= interval->high;
            covered[arm] += held ? 100.0 / static_cast<double>(people.size()) : 0.0;
        }
    }
    std::printf("%-29s %7s", measure.name, text(percent(truth.mean), 1).c_str());
    double error = 0.0;
    for (const Moments& one : found) {
        std::printf(" %7.1f", percent(one.mean));
        error = std::max(error, std::sqrt(one.variance() / static_cast<double>(one.n)));
    }
    std::printf(" %6.1f ", 100.0 * error);
    for (std::size_t arm = 0; arm < arms().size(); ++arm) {
        if (arm + 1 == arms().size() || !std::isnan(truth.mean)) {
            std::printf(" %7.0f", covered[arm]);
        } else {
            std::printf(" %7s", "");
        }
    }
    std::printf("\n");
}

void print_devices(const std::vector<Compared>& people) {
    std::printf(
        "\n%zu people, %d days with each of two devices. The other device gives %.0f %% bits per "
        "second and %+.0f %%\nlateral noise. Change from the own device to the other in %%: as "
        "known, then as found with the same kind\nof work on both (targets of 34 px median), with "
        "targets of 24 or 48 px on the other device's days,\nand with only other electronics (400 "
        "CPI, 1000 reports/s). +-: largest standard error of these.\ncovers: %% of 95 %% "
        "intervals of the single comparison that hold the known change.\n\n",
        people.size(), k_compared_days, percent(std::log(k_other_effect.performance)),
        percent(std::log(k_other_effect.lateral)));
    std::printf("%-29s %-40s %6s  %s\n", "", "  change, %", "", "  covers, %");
    std::printf("%-29s %7s", "measure", "known");
    for (const Arm& arm : arms()) {
        std::printf(" %7s", arm.name);
    }
    std::printf(" %6s ", "+-");
    for (const Arm& arm : arms()) {
        std::printf(" %7s", arm.name);
    }
    std::printf("\n");
    for (const Measure& measure : measures()) {
        if (measure.compared) {
            print_change(measure, people);
        }
    }
}

} // namespace

int main(int argc, char** argv) {
    Scale scale;
    if (argc > 1 && std::string_view{argv[argc - 1]} == "--no-slow") {
        scale.slow_presses = false;
        --argc;
    }
    scale.people = argc > 1 ? std::atoi(argv[1]) : scale.people;
    scale.half_day = argc > 2 ? std::chrono::minutes{std::atoi(argv[2])} : scale.half_day;
    if (scale.people < 6 || scale.half_day < std::chrono::minutes{15} ||
        scale.half_day > std::chrono::hours{4}) {
        std::fprintf(stderr, "usage: bench_truth [PEOPLE [MINUTES_A_HALF_DAY]] [--no-slow], "
                             "6 people or more, 15 to 240 minutes\n");
        return 2;
    }
    Counts counts;
    std::vector<Studied> people;
    for (int i = 1; i <= scale.people; ++i) {
        people.push_back(make_studied(static_cast<std::uint64_t>(i), scale, counts));
    }
    const bool kept = print_people(people);
    std::vector<Compared> compared;
    for (int i = 1; i <= scale.people / 3; ++i) {
        compared.push_back(make_compared(static_cast<std::uint64_t>(i), scale, counts));
    }
    print_devices(compared);
    const double known = static_cast<double>(counts.known) / static_cast<double>(counts.clicks);
    std::printf("\n%llu scored clicks in %llu days, %.0f a day; of %.1f %% the target is known.\n",
                static_cast<unsigned long long>(counts.clicks),
                static_cast<unsigned long long>(counts.days),
                static_cast<double>(counts.clicks) / static_cast<double>(counts.days),
                100.0 * known);
    if (!kept) {
        std::printf("The interval of implied throughput covers less than it says.\n");
    }
    return kept && known > 0.9 ? 0 : 1;
}
