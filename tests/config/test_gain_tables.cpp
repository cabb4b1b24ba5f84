#include "config/gain_settings.hpp"
#include "tests/config/helpers.hpp"

#include <algorithm>

namespace sagitta::config {
namespace {

using estimator::MillimetresPerSecond;

GainTable shipped(const char* name) {
    auto table = read_gain_table(std::filesystem::path{SAGITTA_SOURCE_DIR} / "config" / name);
    REQUIRE_MESSAGE(table.has_value(), table.error().message);
    return *table;
}

double at(const GainTable& table, double speed_mm_s) {
    return table.gain.factor_at(MillimetresPerSecond::of(speed_mm_s));
}

// Source of both curves: published documentation and source of libinput, the desktop input
// library, as quoted (filter-mouse.c, filter-touchpad.c); varies by version.
constexpr double k_mm_s_per_unit_ms = 25.4; // of a 1000 CPI mouse

double mouse_curve(double units_per_ms) {
    if (units_per_ms < 0.07) {
        return 10.0 * units_per_ms + 0.3;
    }
    return units_per_ms < 0.4 ? 1.0 : std::min(1.1 * (units_per_ms - 0.4) + 1.0, 2.0);
}

double touchpad_curve(double mm_s) {
    const double v = std::min(mm_s, 520.0);
    double f = 0.9;
    if (v < 7.0) {
        f = std::min(0.9, 0.1 * v + 0.3);
    } else if (v >= 130.0) {
        f = 0.0025 * (v / 130.0) * (v - 130.0) + 0.9;
    }
    return f * 0.2968;
}

std::string with_gain(const std::string& gain) {
    return "pointers:\n  - name: x\n    gain: " + gain + "\n";
}

} // namespace

TEST_CASE("the mouse table gives the published values at speed setting 0") {
    const GainTable table = shipped("gain-adaptive-mouse.yaml");
    CHECK(at(table, 0.02 * k_mm_s_per_unit_ms) == doctest::Approx(0.5).epsilon(0.001));
    CHECK(at(table, 0.05 * k_mm_s_per_unit_ms) == doctest::Approx(0.8).epsilon(0.001));
    CHECK(at(table, 0.2 * k_mm_s_per_unit_ms) == doctest::Approx(1.0).epsilon(0.001));
    CHECK(at(table, 0.6 * k_mm_s_per_unit_ms) == doctest::Approx(1.22).epsilon(0.001));
    CHECK(at(table, 1.0 * k_mm_s_per_unit_ms) == doctest::Approx(1.66).epsilon(0.001));
    CHECK(at(table, 1.31 * k_mm_s_per_unit_ms) == doctest::Approx(2.0).epsilon(0.001));
    CHECK(at(table, 10.0 * k_mm_s_per_unit_ms) == doctest::Approx(2.0).epsilon(0.001));
    CHECK(table.normalised_to == estimator::Cpi::of(1000.0));
}

TEST_CASE("both tables follow their curve within 1 % at every speed") {
    const GainTable mouse = shipped("gain-adaptive-mouse.yaml");
    const GainTable touchpad = shipped("gain-adaptive-touchpad.yaml");
    double worst_mouse = 0.0;
    double worst_touchpad = 0.0;
    for (int i = 0; i <= 8000; ++i) {
        const double speed = i * 0.1;
        worst_mouse =
            std::max(worst_mouse,
                     std::abs(at(mouse, speed) / mouse_curve(speed / k_mm_s_per_unit_ms) - 1.0));
        worst_touchpad =
            std::max(worst_touchpad, std::abs(at(touchpad, speed) / touchpad_curve(speed) - 1.0));
    }
    CHECK(worst_mouse < 0.001);
    CHECK(worst_touchpad < 0.005);
    CHECK(touchpad.normalised_to == estimator::Cpi::of(1000.0));
}

TEST_CASE("the touchpad table gives hand-computed values of its curve") {
    const GainTable table = shipped("gain-adaptive-touchpad.yaml");
    CHECK(at(table, 0.0) == doctest::Approx(0.3 * 0.2968).epsilon(0.001));
    CHECK(at(table, 3.0) == doctest::Approx(0.6 * 0.2968).epsilon(0.001));
    CHECK(at(table, 60.0) == doctest::Approx(0.9 * 0.2968).epsilon(0.001));
    CHECK(at(table, 260.0) == doctest::Approx(1.55 * 0.2968).epsilon(0.01));
    CHECK(at(table, 520.0) == doctest::Approx(4.8 * 0.2968).epsilon(0.001));
    CHECK(at(table, 2000.0) == doctest::Approx(4.8 * 0.2968).epsilon(0.001));
}

TEST_CASE("a flat gain is its factor at every speed") {
    const Settings settings = settings_in(with_gain("{model: flat, factor: 1.5}"));
    const PointerSettings& pointer = settings.pointers.front();
    CHECK(pointer.gain.is_flat());
    CHECK(pointer.gain.factor_at(MillimetresPerSecond::of(100.0)) == 1.5);
    CHECK_FALSE(pointer.gain_normalised_to.has_value());
    CHECK(settings_in(with_gain("{factor: 2}"))
              .pointers.front()
              .gain.factor_at(MillimetresPerSecond::zero()) == 2.0);
}

TEST_CASE("a table stands in the settings or in a file beside them") {
    const std::string points = "points: [[0, 0.5], [100, 1.5]]";
    const TempFolder folder;
    (void)folder.write("gain.yaml", points + "\nnormalised_to_cpi: 800\n");
    const auto beside =
        read_settings(folder.write("sagitta.yaml", with_gain("{model: table, file: gain.yaml}")));
    REQUIRE_MESSAGE(beside.has_value(), beside.error().message);
    const Settings inside =
        settings_in(with_gain("{model: table, normalised_to_cpi: 800, " + points + "}"));
    for (const Settings& settings : {*beside, inside}) {
        const PointerSettings& pointer = settings.pointers.front();
        CHECK(pointer.gain.factor_at(MillimetresPerSecond::of(50.0)) == 1.0);
        CHECK(pointer.gain_normalised_to == estimator::Cpi::of(800.0));
    }
}

TEST_CASE("a table that is empty, negative, or not increasing in speed is refused") {
    const auto inline_table = [](const std::string& points) {
        return message_of(with_gain("{model: table, points: " + points + "}"));
    };
    CHECK(inline_table("[]") ==
          "sagitta.yaml:3:34: pointers[1].gain.points is a list, but must be a list of at least "
          "one pair [speed in mm/s, factor in px per count]");
    CHECK(inline_table("[[0, 1], [50, 1], [50, 2]]") ==
          "sagitta.yaml:3:52: pointers[1].gain.points[3] does not increase; each speed must be "
          "above that of the point before");
    CHECK(inline_table("[[0, 1], [50, -1]]") ==
          "sagitta.yaml:3:48: pointers[1].gain.points[2][2] is '-1', but must be 0.001 to 1000 px "
          "per count");
    CHECK(inline_table("[[-5, 1]]") ==
          "sagitta.yaml:3:36: pointers[1].gain.points[1][1] is '-5', but must be 0 to 100000 mm/s");
    CHECK(inline_table("[[0, 1, 2]]") ==
          "sagitta.yaml:3:35: pointers[1].gain.points[1] is a list, but must be a pair [speed in "
          "mm/s, factor in px per count]");
    CHECK(inline_table("[[0, .nan]]") ==
          "sagitta.yaml:3:39: pointers[1].gain.points[1][2] is '.nan', but must be a number, 0.001 "
          "to 1000 px per count");
}

TEST_CASE("keys of the other model are refused") {
    CHECK(message_of(with_gain("{model: flat, points: [[0, 1]]}")) ==
          "sagitta.yaml:3:25: pointers[1].gain.points does not belong here: the model is flat; "
          "write 'model: table'");
    CHECK(message_of(with_gain("{model: table, factor: 1}")) ==
          "sagitta.yaml:3:26: pointers[1].gain.factor does not belong here: the model is table");
    CHECK(message_of(with_gain("{model: table}")) ==
          "sagitta.yaml:3:11: pointers[1].gain is a table without points; give 'points' or a "
          "'file' of them");
    CHECK(message_of(with_gain("{model: table, file: a, points: [[0, 1]]}")) ==
          "sagitta.yaml:3:35: pointers[1].gain.points does not belong here: it stands in the "
          "table's file");
    CHECK(message_of(with_gain("{model: curved}")) ==
          "sagitta.yaml:3:19: pointers[1].gain.model is 'curved', but must be flat or table");
}

TEST_CASE("a wrong table file is refused with its own place") {
    const TempFolder folder;
    const auto settings =
        folder.write("sagitta.yaml", with_gain("{model: table, file: gain.yaml}"));
    const std::string file = (folder.path() / "gain.yaml").string();
    CHECK(read_settings(settings).error().message == file + ": there is no such file");
    (void)folder.write("gain.yaml", "points: [[0, 1], [0, 2]]\n");
    CHECK(read_settings(settings).error().message ==
          file + ":1:18: points[2] does not increase; each speed must be above that of the point "
                 "before");
    (void)folder.write("gain.yaml", "# no points\n");
    CHECK(read_settings(settings).error().message ==
          file + ":1:1: the file lacks the key 'points'");
    (void)folder.write("gain.yaml", "model: table\n");
    CHECK(read_settings(settings).error().message ==
          file + ":1:1: unknown key 'model'; the keys here are points and normalised_to_cpi");
}

} // namespace sagitta::config
