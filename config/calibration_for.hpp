// The calibration of a pointer as the settings have it: one rule for what is recorded, replayed
// and shown.
#pragma once

#include "config/settings.hpp"

namespace sagitta::config {

/// What the command line says of a pointer; it goes before the settings.
struct CalibrationOverrides {
    std::optional<estimator::Cpi> cpi;
    std::optional<estimator::Gain> gain;
};

/// The calibration of a pointer: CPI, gain and the gain table's resolution from its entry in the
/// settings, where the command line does not say otherwise; the CPI falls back as
/// estimator::calibrate tells.
[[nodiscard]] estimator::Calibration calibration_for(const Settings& settings,
                                                     const estimator::PointerDescription& pointer,
                                                     const CalibrationOverrides& overrides = {});

} // namespace sagitta::config
