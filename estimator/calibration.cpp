#include "estimator/calibration.hpp"

#include <algorithm>
#include <utility>

namespace sagitta::estimator {
namespace {

Calibration relative(Cpi cpi, CpiSource source, Gain gain) {
    const double mm_per_count = k_mm_per_inch / cpi.value();
    return {mm_per_count, mm_per_count, 1.0, 1.0, std::move(gain), cpi, source};
}

Calibration absolute(AxisResolution resolution, CpiSource source, Gain gain) {
    const double mm_x = 1.0 / resolution.x_per_mm;
    const double mm_y = 1.0 / resolution.y_per_mm;
    const double px_per_mm = k_assumed_cpi.value() / k_mm_per_inch;
    return {mm_x,
            mm_y,
            mm_x * px_per_mm,
            mm_y * px_per_mm,
            std::move(gain),
            Cpi::of(resolution.x_per_mm * k_mm_per_inch),
            source};
}

Calibration calibrate_relative(const PointerDescription& pointer, std::optional<Cpi> override_cpi,
                               CpiSource override_source, Gain gain) {
    if (override_cpi) {
        return relative(*override_cpi, override_source, std::move(gain));
    }
    if (pointer.udev_cpi) {
        return relative(*pointer.udev_cpi, CpiSource::udev, std::move(gain));
    }
    return relative(k_assumed_cpi, CpiSource::assumed, std::move(gain));
}

Calibration calibrate_absolute(const PointerDescription& pointer, std::optional<Cpi> override_cpi,
                               CpiSource override_source, Gain gain) {
    if (override_cpi) {
        const double per_mm = override_cpi->value() / k_mm_per_inch;
        return absolute({per_mm, per_mm}, override_source, std::move(gain));
    }
    if (pointer.resolution) {
        return absolute(*pointer.resolution, CpiSource::axis_resolution, std::move(gain));
    }
    return relative(k_assumed_cpi, CpiSource::assumed, std::move(gain));
}

/// Brings a relative pointer to the resolution that its desktop's gain table is made for.
void normalise(Calibration& calibration, const PointerDescription& pointer, Cpi table_cpi) {
    const Cpi known = pointer.udev_cpi.value_or(k_assumed_cpi);
    const double share = std::min(1.0, table_cpi / known);
    calibration.px_per_count_x *= share;
    calibration.px_per_count_y *= share;
    calibration.gain = calibration.gain.with_speeds_times(table_cpi / (calibration.cpi * share));
}

} // namespace

Calibration calibrate(const PointerDescription& pointer, std::optional<Cpi> override_cpi,
                      CpiSource override_source, Gain gain, std::optional<Cpi> gain_normalised_to) {
    if (pointer.kind == PointerKind::touchpad || pointer.kind == PointerKind::absolute) {
        // Its speed is in mm/s already, whatever its units.
        return calibrate_absolute(pointer, override_cpi, override_source, std::move(gain));
    }
    Calibration calibration =
        calibrate_relative(pointer, override_cpi, override_source, std::move(gain));
    if (gain_normalised_to && !calibration.gain.is_flat()) {
        normalise(calibration, pointer, *gain_normalised_to);
    }
    return calibration;
}

} // namespace sagitta::estimator
