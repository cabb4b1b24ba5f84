#include "fixtures.hpp"

#include <algorithm>
#include <cstdlib>
#include <fstream>
#include <iterator>
#include <stdexcept>

namespace sagitta::tests {

input_event event_at(std::int64_t us, std::uint16_t type, std::uint16_t code, std::int32_t value) {
    input_event event{};
    event.input_event_sec = us / 1'000'000;
    event.input_event_usec = us % 1'000'000;
    event.type = type;
    event.code = code;
    event.value = value;
    return event;
}

input_event syn_at(std::int64_t us) {
    return event_at(us, EV_SYN, SYN_REPORT, 0);
}

TempFolder::TempFolder() {
    std::string name = (std::filesystem::temp_directory_path() / "sagitta-input-XXXXXX").string();
    if (::mkdtemp(name.data()) == nullptr)
        throw std::runtime_error{"no temporary folder"};
    m_path = name;
}

TempFolder::~TempFolder() {
    std::error_code ignored;
    std::filesystem::remove_all(m_path, ignored);
}

std::filesystem::path TempFolder::file(const std::string& name, std::string_view content) const {
    const std::filesystem::path path = m_path / name;
    std::filesystem::create_directories(path.parent_path());
    std::ofstream stream{path, std::ios::binary};
    stream.write(content.data(), static_cast<std::streamsize>(content.size()));
    return path;
}

std::string raw_bytes(const std::vector<input_event>& events) {
    return {reinterpret_cast<const char*>(events.data()), events.size() * sizeof(input_event)};
}

std::string content_of(const std::filesystem::path& file) {
    std::ifstream stream{file, std::ios::binary};
    return {std::istreambuf_iterator<char>{stream}, {}};
}

std::filesystem::path sample(const std::string& name) {
    return std::filesystem::path{SAGITTA_TEST_DATA} / "reference" / "recordings" / name;
}

estimator::Result<Drained> drain(const std::filesystem::path& file) {
    auto recording = input::open_recording(file);
    if (!recording)
        return tl::unexpected{recording.error()};
    Drained drained;
    estimator::ReportBatch batch;
    while (true) {
        if (const auto read = (*recording)->next(batch); !read)
            return tl::unexpected{read.error()};
        if (batch.empty())
            break;
        drained.reports.insert(drained.reports.end(), batch.begin(), batch.end());
    }
    drained.remarks = (*recording)->remarks();
    drained.pointers.assign((*recording)->pointers().begin(), (*recording)->pointers().end());
    drained.format = (*recording)->format();
    drained.first_stamp = (*recording)->first_stamp();
    return drained;
}

std::vector<std::string> as_text(const estimator::ReportBatch& reports,
                                 estimator::PointerTime zero) {
    std::vector<std::string> lines;
    for (const estimator::Report& report : reports)
        lines.push_back(std::to_string((report.time - zero).count()) + " us pointer " +
                        std::to_string(static_cast<int>(report.pointer)) + " moved " +
                        std::to_string(report.dx) + " " + std::to_string(report.dy) + " wheel " +
                        std::to_string(report.wheel_120ths) + " pressed " +
                        std::to_string(report.pressed) + " released " +
                        std::to_string(report.released) + (report.after_loss ? " lost" : ""));
    return lines;
}

bool any_contains(const std::vector<std::string>& sentences, std::string_view part) {
    return std::any_of(sentences.begin(), sentences.end(), [&](const std::string& sentence) {
        return sentence.find(part) != std::string::npos;
    });
}

} // namespace sagitta::tests
