// What a libinput-record file says of one device before its events.
#pragma once

#include "estimator/result.hpp"
#include "input/device_facts.hpp"

#include <string>

namespace sagitta::input {

/// @param yaml  the device's item of the list `devices`, without its events
/// @return bad_format when it is not YAML or lacks the device's name
[[nodiscard]] estimator::Result<DeviceFacts> read_libinput_header(const std::string& yaml);

} // namespace sagitta::input
