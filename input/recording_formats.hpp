// The three readers behind open_recording(). Each takes an open, non-empty, regular file.
#pragma once

#include "input/file.hpp"
#include "input/recording.hpp"

#include <string_view>

namespace sagitta::input {

using OpenedRecording = estimator::Result<std::unique_ptr<Recording>>;

/// What a reader starts from.
struct RecordingFile {
    Descriptor file; ///< at its beginning
    std::filesystem::path path;
    std::string_view head; ///< its first bytes, up to k_head_bytes; valid during the call
    std::uint64_t size;
};
constexpr std::size_t k_head_bytes = std::size_t{64} * 1024;

[[nodiscard]] bool looks_raw(std::string_view head);
[[nodiscard]] bool looks_like_evemu(std::string_view head);
[[nodiscard]] bool looks_like_libinput_record(std::string_view head);

[[nodiscard]] OpenedRecording open_raw(RecordingFile file);
[[nodiscard]] OpenedRecording open_evemu(RecordingFile file);
[[nodiscard]] OpenedRecording open_libinput_record(RecordingFile file);

/// "is no recording; accepted are ..." as the end of a sentence.
[[nodiscard]] std::string accepted_formats();

} // namespace sagitta::input
