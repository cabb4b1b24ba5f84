// Any bytes as evemu text.
#include "drain_recording.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
    sagitta::fuzz::drain_recording("# EVEMU 1.3\n", {data, size});
    return 0;
}
