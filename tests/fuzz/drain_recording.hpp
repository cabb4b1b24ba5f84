// Reads bytes as a recording, to the end, as the fuzz targets of the three formats do.
#pragma once

#include <cstddef>
#include <cstdint>
#include <span>
#include <string_view>

namespace sagitta::fuzz {

/// @param prefix  put before the bytes, so that the search starts within a format
/// Aborts when a promise of the readers is broken.
void drain_recording(std::string_view prefix, std::span<const std::uint8_t> bytes);

} // namespace sagitta::fuzz
