// Invented events, files in a folder of their own, and recordings read to their end.
#pragma once

#include "estimator/report.hpp"
#include "input/recording.hpp"

#include <cstdint>
#include <filesystem>
#include <initializer_list>
#include <linux/input.h>
#include <string>
#include <string_view>
#include <vector>

namespace sagitta::tests {

/// An event at a stamp in microseconds.
[[nodiscard]] input_event event_at(std::int64_t us, std::uint16_t type, std::uint16_t code,
                                   std::int32_t value);
[[nodiscard]] input_event syn_at(std::int64_t us);

/// A folder that vanishes with the object.
class TempFolder {
public:
    TempFolder();
    TempFolder(const TempFolder&) = delete;
    TempFolder& operator=(const TempFolder&) = delete;
    ~TempFolder();
    [[nodiscard]] const std::filesystem::path& path() const { return m_path; }
    /// Writes a file, with its folders. @return its path
    std::filesystem::path file(const std::string& name, std::string_view content) const;

private:
    std::filesystem::path m_path;
};

/// The bytes of events as a raw recording holds them.
[[nodiscard]] std::string raw_bytes(const std::vector<input_event>& events);
[[nodiscard]] std::string content_of(const std::filesystem::path& file);
[[nodiscard]] std::filesystem::path sample(const std::string& name);

/// All that a recording gives.
struct Drained {
    estimator::ReportBatch reports;
    std::vector<std::string> remarks;
    std::vector<estimator::PointerDescription> pointers;
    input::RecordingFormat format;
    estimator::PointerTime first_stamp;
};
[[nodiscard]] estimator::Result<Drained> drain(const std::filesystem::path& file);

/// One line a report, times counted from `zero`, for comparing.
[[nodiscard]] std::vector<std::string> as_text(const estimator::ReportBatch& reports,
                                               estimator::PointerTime zero = {});

[[nodiscard]] bool any_contains(const std::vector<std::string>& sentences, std::string_view part);

} // namespace sagitta::tests
