// Any bytes as settings: read or refused in one line that begins with the file's name.
#include "config/settings.hpp"

#include <cstddef>
#include <cstdint>
#include <cstdlib>
#include <string>
#include <string_view>

namespace {

void require(bool holds) {
    if (!holds) {
        std::abort();
    }
}

} // namespace

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
    // NOLINTNEXTLINE: bytes are read as characters
    const std::string_view text{reinterpret_cast<const char*>(data), size};
    const auto settings = sagitta::config::parse_settings(text, "/nowhere/sagitta.yaml");
    if (settings) {
        require(settings->batch_movements >= 1);
        require(settings->rules.segmentation.rest.count() > 0);
        require(settings->confidence > 0.0 && settings->confidence < 1.0);
    } else {
        const std::string& message = settings.error().message;
        require(message.find_first_of("\n\x1B") == std::string::npos);
        require(message.starts_with("/"));
    }
    return 0;
}
