#include "estimator/pipeline.hpp"
#include "input/raw_writer.hpp"
#include "input/recording.hpp"

#include <cmath>
#include <doctest/doctest.h>
#include <filesystem>
#include <string>
#include <unistd.h>
#include <vector>

using namespace sagitta;
using namespace sagitta::estimator;

namespace {

struct Movements final : MovementSink {
    std::vector<Movement> found;
    std::vector<Outcome> outcomes;
    void on_movement(const Movement& movement) override { found.push_back(movement); }
    void on_exposure(const Exposure& exposure) override { outcomes.push_back(exposure.outcome); }
    void on_press(PointerIndex, PointerTime, Button) override {}
    void on_wheel(PointerIndex, PointerTime, std::uint32_t) override {}
};

ReportBatch reports_of(const std::filesystem::path& file) {
    auto recording = input::open_recording(file);
    REQUIRE_MESSAGE(recording.has_value(), file.string());
    ReportBatch all;
    ReportBatch batch;
    do {
        REQUIRE((*recording)->next(batch).has_value());
        all.insert(all.end(), batch.begin(), batch.end());
    } while (!batch.empty());
    return all;
}

/// The sample moves 12 counts, so the shortest distance is lowered for it to be scored.
void score(const ReportBatch& reports, Movements& movements) {
    Rules rules;
    rules.segmentation.min_distance = Pixels::of(5.0);
    Pipeline pipeline{rules, movements};
    pipeline.set_pointer(PointerIndex{0},
                         calibrate({}, Cpi::of(1000.0), CpiSource::command_line, Gain::unity()));
    pipeline.process(reports);
    pipeline.finish();
}

std::vector<double> figures(const Movement& movement) {
    const Scores& s = movement.scores;
    return {s.distance.value(),      s.direction.value(),     seconds(s.movement_time),
            seconds(s.dwell),        s.path.value(),          s.error.value(),
            s.offset.value(),        s.max_deviation.value(), s.peak_speed.value(),
            seconds(s.time_to_peak), s.smoothness_sparc,      s.smoothness_ldlj,
            double{1} * s.reports};
}

} // namespace

TEST_CASE("the text samples give the same movement as each other and as their raw form") {
    const std::filesystem::path samples =
        std::filesystem::path{SAGITTA_TEST_DATA} / "reference" / "recordings";
    const ReportBatch evemu = reports_of(samples / "sample_mouse.evemu");
    const ReportBatch libinput = reports_of(samples / "sample_mouse.libinput-record.yml");
    const std::filesystem::path raw = std::filesystem::temp_directory_path() /
                                      ("sagitta-same-" + std::to_string(getpid()) + ".raw");
    auto writer = input::RawWriter::create(raw);
    REQUIRE(writer.has_value());
    REQUIRE(writer->write(evemu, ClockOffset{}).has_value());
    REQUIRE(writer->close().has_value());
    const ReportBatch rewritten = reports_of(raw);
    std::filesystem::remove(raw);

    Movements from_evemu;
    Movements from_libinput;
    Movements from_raw;
    score(evemu, from_evemu);
    score(libinput, from_libinput);
    score(rewritten, from_raw);

    REQUIRE(from_evemu.found.size() == 1);
    REQUIRE(from_libinput.found.size() == 1);
    REQUIRE(from_raw.found.size() == 1);
    CHECK(from_evemu.outcomes == from_raw.outcomes);
    CHECK(from_libinput.outcomes == from_raw.outcomes);
    CHECK(figures(from_evemu.found[0]) == figures(from_raw.found[0]));
    // evemu's stamps begin at 1 us and the others' at 0, so the 5 ms grid lies 1 us elsewhere.
    const std::vector<double> one = figures(from_libinput.found[0]);
    const std::vector<double> other = figures(from_raw.found[0]);
    for (std::size_t i = 0; i < one.size(); ++i) {
        CAPTURE(i);
        CHECK(one[i] == doctest::Approx(other[i]).epsilon(1e-3));
    }
    // By hand: x 3 + 5 + 4, y -1 + 2 (the kernel's sign), pressed 224 ms after the last motion.
    CHECK(from_raw.found[0].scores.distance.value() == doctest::Approx(std::sqrt(145.0)));
    CHECK(seconds(from_raw.found[0].scores.dwell) == doctest::Approx(0.224));
}
