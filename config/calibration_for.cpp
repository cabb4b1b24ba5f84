#include "config/calibration_for.hpp"

#include <utility>

namespace sagitta::config {

estimator::Calibration calibration_for(const Settings& settings,
                                       const estimator::PointerDescription& pointer,
                                       const CalibrationOverrides& overrides) {
    const PointerSettings unsaid{};
    const PointerSettings* entry = settings_for(settings, pointer.name);
    const PointerSettings& said = entry != nullptr ? *entry : unsaid;
    estimator::Gain gain = overrides.gain.value_or(said.gain);
    if (overrides.cpi) {
        return estimator::calibrate(pointer, overrides.cpi, estimator::CpiSource::command_line,
                                    std::move(gain), said.gain_normalised_to);
    }
    return estimator::calibrate(pointer, said.cpi, estimator::CpiSource::config, std::move(gain),
                                said.gain_normalised_to);
}

} // namespace sagitta::config
