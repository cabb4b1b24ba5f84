#include "estimator/calibration.hpp"

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

} // namespace

Calibration calibrate(const PointerDescription& pointer, std::optional<Cpi> override_cpi,
                      CpiSource override_source, Gain gain) {
    const bool is_absolute =
        pointer.kind == PointerKind::touchpad || pointer.kind == PointerKind::absolute;
    if (is_absolute) {
        if (override_cpi) {
            const double per_mm = override_cpi->value() / k_mm_per_inch;
            return absolute({per_mm, per_mm}, override_source, std::move(gain));
        }
        if (pointer.resolution) {
            return absolute(*pointer.resolution, CpiSource::axis_resolution, std::move(gain));
        }
        return relative(k_assumed_cpi, CpiSource::assumed, std::move(gain));
    }
    if (override_cpi) {
        return relative(*override_cpi, override_source, std::move(gain));
    }
    if (pointer.udev_cpi) {
        return relative(*pointer.udev_cpi, CpiSource::udev, std::move(gain));
    }
    return relative(k_assumed_cpi, CpiSource::assumed, std::move(gain));
}

} // namespace sagitta::estimator
