#include "input/file.hpp"

#include <cerrno>
#include <system_error>
#include <unistd.h>
#include <utility>

namespace sagitta::input {

using estimator::ErrorCode;

Descriptor& Descriptor::operator=(Descriptor&& other) noexcept {
    std::swap(m_fd, other.m_fd);
    return *this;
}

Descriptor::~Descriptor() {
    if (m_fd >= 0)
        ::close(m_fd);
}

int Descriptor::release() {
    return std::exchange(m_fd, -1);
}

estimator::Result<std::size_t> read_full(int fd, std::span<std::byte> buffer,
                                         const std::filesystem::path& file) {
    std::size_t have = 0;
    while (have < buffer.size()) {
        const ssize_t got = ::read(fd, buffer.data() + have, buffer.size() - have);
        const int error = errno;
        if (got > 0)
            have += static_cast<std::size_t>(got);
        else if (got == 0)
            break;
        else if (error != EINTR)
            return estimator::fail(ErrorCode::io, "cannot read " + shown(file) + ": " +
                                                      text_of_errno(error) +
                                                      "; copy it to another disk and try again");
    }
    return have;
}

ErrorCode code_of_errno(int error) {
    switch (error) {
    case ENOENT:
    case ENOTDIR:
    case ENODEV:
    case ENXIO:
        return ErrorCode::not_found;
    case EACCES:
    case EPERM:
    case EROFS:
        return ErrorCode::no_permission;
    case ENOSPC:
    case EDQUOT:
    case EFBIG:
        return ErrorCode::no_space;
    case EEXIST:
        return ErrorCode::already_there;
    default:
        return ErrorCode::io;
    }
}

std::string text_of_errno(int error) {
    return std::error_code{error, std::generic_category()}.message();
}

std::string shown(const std::filesystem::path& file) {
    std::string text = file.string();
    for (char& character : text)
        if (static_cast<unsigned char>(character) < 0x20 || character == 0x7f)
            character = '?';
    return text;
}

} // namespace sagitta::input
