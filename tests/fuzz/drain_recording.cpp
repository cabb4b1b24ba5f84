#include "drain_recording.hpp"

#include "input/packet.hpp"
#include "input/recording.hpp"

#include <cstdlib>
#include <string>
#include <sys/mman.h>
#include <unistd.h>

namespace sagitta::fuzz {

namespace {

void require(bool promise) {
    if (!promise)
        std::abort();
}

void write_all(int fd, const void* data, std::size_t size) {
    require(::write(fd, data, size) == static_cast<ssize_t>(size));
}

bool is_possible(std::int32_t delta) {
    return delta >= -input::k_max_delta && delta <= input::k_max_delta;
}

void drain(input::Recording& recording) {
    estimator::ReportBatch batch;
    while (recording.next(batch) && !batch.empty()) {
        for (const estimator::Report& report : batch) {
            require(is_possible(report.dx) && is_possible(report.dy));
            require(static_cast<std::size_t>(report.pointer) < recording.pointers().size());
            require(report.dx != 0 || report.dy != 0 || report.wheel_120ths != 0 ||
                    report.pressed != 0 || report.released != 0);
        }
    }
    for (const std::string& remark : recording.remarks())
        require(!remark.empty() && remark.find('\n') == std::string::npos);
    for (const auto& pointer : recording.pointers())
        require(!pointer.name.empty());
    (void)recording.first_stamp();
}

} // namespace

void drain_recording(std::string_view prefix, std::span<const std::uint8_t> bytes) {
    const int fd = ::memfd_create("recording", MFD_CLOEXEC);
    require(fd >= 0);
    write_all(fd, prefix.data(), prefix.size());
    write_all(fd, bytes.data(), bytes.size());
    auto recording = input::open_recording("/proc/self/fd/" + std::to_string(fd));
    if (recording)
        drain(**recording);
    else
        require(!recording.error().message.empty());
    ::close(fd);
}

} // namespace sagitta::fuzz
