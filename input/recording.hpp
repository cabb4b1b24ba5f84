// Recordings as a source of reports: raw streams of struct input_event, evemu text and
// libinput-record YAML, told apart by content.
#pragma once

#include "estimator/report_source.hpp"

#include <filesystem>
#include <memory>

namespace sagitta::input {

enum class RecordingFormat { raw, evemu, libinput_record };

/// A recording and what was noticed while reading it.
class Recording : public estimator::ReportSource {
public:
    [[nodiscard]] virtual RecordingFormat format() const = 0;
    /// One sentence for each thing skipped so far: a cut last event, a broken line (with its
    /// number), a reversed stamp. Repeats are counted, not listed.
    [[nodiscard]] virtual std::vector<std::string> remarks() const = 0;
    /// Stamp of the first event, as written in the file; valid after a first non-empty next().
    [[nodiscard]] virtual estimator::PointerTime first_stamp() const = 0;
};

/// Opens a recording of any format and size; memory does not grow with the file (libinput-record
/// YAML excepted, which is text of hand-made length and refused above 64 MiB).
/// @return not_found, no_permission, io; bad_format for an empty file, a folder, or content that
///         is none of the three formats
[[nodiscard]] estimator::Result<std::unique_ptr<Recording>>
open_recording(const std::filesystem::path& file);

} // namespace sagitta::input
