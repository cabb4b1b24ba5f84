#include "config/calibration_for.hpp"

#include <doctest/doctest.h>

namespace sagitta::config {
namespace {

using estimator::Cpi;
using estimator::CpiSource;
using estimator::MillimetresPerSecond;

estimator::PointerDescription mouse(const char* name, std::optional<double> udev_cpi = {}) {
    estimator::PointerDescription pointer;
    pointer.name = name;
    if (udev_cpi) {
        pointer.udev_cpi = Cpi::of(*udev_cpi);
    }
    return pointer;
}

estimator::Gain steep_table() {
    return estimator::Gain::table(
               {{MillimetresPerSecond::of(0.0), 1.0}, {MillimetresPerSecond::of(100.0), 3.0}})
        .value();
}

Settings with_entry(PointerSettings entry) {
    Settings settings;
    settings.pointers = {std::move(entry)};
    return settings;
}

TEST_CASE("a pointer without an entry has udev's CPI, else an assumed one, and gain 1") {
    const auto known = calibration_for({}, mouse("Upright mouse", 1600));
    CHECK(known.cpi.value() == 1600.0);
    CHECK(known.cpi_source == CpiSource::udev);
    CHECK(known.gain.is_flat());
    CHECK(known.gain.factor_at(MillimetresPerSecond::of(50.0)) == 1.0);
    CHECK(calibration_for({}, mouse("Upright mouse")).cpi_source == CpiSource::assumed);
}

TEST_CASE("an entry's CPI and gain hold for pointers of its name only") {
    PointerSettings entry;
    entry.name = "Upright*";
    entry.cpi = Cpi::of(800.0);
    entry.gain = estimator::Gain::flat(1.5).value();
    const Settings settings = with_entry(entry);
    const auto upright = calibration_for(settings, mouse("Upright mouse", 1600));
    CHECK(upright.cpi.value() == 800.0);
    CHECK(upright.cpi_source == CpiSource::config);
    CHECK(upright.gain.factor_at(MillimetresPerSecond::of(50.0)) == 1.5);
    CHECK(calibration_for(settings, mouse("Thumb trackball", 1600)).cpi.value() == 1600.0);
}

TEST_CASE("a gain table made for another resolution gets its counts and speeds brought to it") {
    PointerSettings entry;
    entry.name = "Upright mouse";
    entry.gain = steep_table();
    const auto own = calibration_for(with_entry(entry), mouse("Upright mouse", 2000));
    CHECK(own.px_per_count_x == 1.0);
    CHECK(own.gain.factor_at(MillimetresPerSecond::of(50.0)) == doctest::Approx(2.0));

    entry.gain_normalised_to = Cpi::of(1000.0);
    const auto brought = calibration_for(with_entry(entry), mouse("Upright mouse", 2000));
    CHECK(brought.px_per_count_x == doctest::Approx(0.5));
    CHECK(brought.cpi.value() == 2000.0);
    // What the maker's data sheet says weighs on speeds, not on what the desktop knows.
    entry.cpi = Cpi::of(500.0);
    const auto slower = calibration_for(with_entry(entry), mouse("Upright mouse", 2000));
    CHECK(slower.px_per_count_x == doctest::Approx(0.5));
    CHECK(slower.gain.factor_at(MillimetresPerSecond::of(50.0)) !=
          doctest::Approx(brought.gain.factor_at(MillimetresPerSecond::of(50.0))));
}

TEST_CASE("the command line goes before the settings, each word for itself") {
    PointerSettings entry;
    entry.name = "*";
    entry.cpi = Cpi::of(800.0);
    entry.gain = steep_table();
    entry.gain_normalised_to = Cpi::of(1000.0);
    const Settings settings = with_entry(entry);
    const auto pointer = mouse("Upright mouse", 2000);

    const auto by_cpi = calibration_for(settings, pointer, {Cpi::of(1200.0), {}});
    CHECK(by_cpi.cpi.value() == 1200.0);
    CHECK(by_cpi.cpi_source == CpiSource::command_line);
    CHECK_FALSE(by_cpi.gain.is_flat());
    CHECK(by_cpi.px_per_count_x == doctest::Approx(0.5));

    const auto by_gain =
        calibration_for(settings, pointer, {{}, estimator::Gain::flat(2.0).value()});
    CHECK(by_gain.cpi.value() == 800.0);
    CHECK(by_gain.cpi_source == CpiSource::config);
    CHECK(by_gain.gain.is_flat());
    CHECK(by_gain.px_per_count_x == 1.0);
}

} // namespace
} // namespace sagitta::config
