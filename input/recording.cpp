#include "input/recording.hpp"

#include "input/recording_formats.hpp"

#include <cerrno>
#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>
#include <vector>

namespace sagitta::input {

using estimator::ErrorCode;
using estimator::fail;

namespace {

estimator::Result<RecordingFile> open_file(const std::filesystem::path& path) {
    // Non-blocking, so that a pipe without a writer does not hang.
    Descriptor file{::open(path.c_str(), O_RDONLY | O_CLOEXEC | O_NONBLOCK | O_NOCTTY)};
    const int error = errno;
    if (file.get() < 0)
        return fail(code_of_errno(error), "cannot open the recording " + shown(path) + ": " +
                                              text_of_errno(error) +
                                              "; check its name and permissions");
    struct stat status {};
    if (::fstat(file.get(), &status) != 0)
        return fail(ErrorCode::io,
                    "cannot look at the recording " + shown(path) + ": " + text_of_errno(errno));
    if (S_ISDIR(status.st_mode))
        return fail(ErrorCode::bad_format,
                    shown(path) + " is a folder; name the recordings in it one by one");
    if (!S_ISREG(status.st_mode))
        return fail(ErrorCode::bad_format, shown(path) + " is a device, a pipe or a socket, not "
                                                         "a file; copy its data into a file first");
    if (status.st_size == 0)
        return fail(ErrorCode::bad_format,
                    shown(path) + " is empty; a recording holds at least one event");
    ::posix_fadvise(file.get(), 0, 0, POSIX_FADV_SEQUENTIAL);
    return RecordingFile{std::move(file), path, {}, static_cast<std::uint64_t>(status.st_size)};
}

} // namespace

std::string accepted_formats() {
    return "is no recording of a pointer; accepted are a raw stream of struct input_event, evemu "
           "text and libinput-record YAML";
}

OpenedRecording open_recording(const std::filesystem::path& path) {
    auto file = open_file(path);
    if (!file)
        return tl::unexpected{file.error()};
    std::vector<char> buffer(k_head_bytes);
    const auto got = read_full(file->file.get(), std::as_writable_bytes(std::span{buffer}), path);
    if (!got)
        return tl::unexpected{got.error()};
    if (::lseek(file->file.get(), 0, SEEK_SET) != 0)
        return fail(ErrorCode::io,
                    "cannot return to the start of " + shown(path) + ": " + text_of_errno(errno));
    file->head = std::string_view{buffer.data(), *got};
    if (looks_like_evemu(file->head))
        return open_evemu(std::move(*file));
    if (looks_like_libinput_record(file->head))
        return open_libinput_record(std::move(*file));
    if (looks_raw(file->head))
        return open_raw(std::move(*file));
    return fail(ErrorCode::bad_format, shown(path) + " " + accepted_formats());
}

} // namespace sagitta::input
