// Any bytes as a raw stream of struct input_event.
#include "drain_recording.hpp"

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
    sagitta::fuzz::drain_recording("", {data, size});
    return 0;
}
