// Any bytes as libinput-record YAML.
#include "drain_recording.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
    sagitta::fuzz::drain_recording("version: 1\ndevices:\n", {data, size});
    return 0;
}
