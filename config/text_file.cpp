#include "config/text_file.hpp"

#include <algorithm>
#include <array>
#include <cerrno>
#include <cstdint>
#include <cstdio>
#include <fcntl.h>
#include <sys/stat.h>
#include <system_error>
#include <unistd.h>

namespace sagitta::config {
namespace {

using estimator::Error;
using estimator::ErrorCode;
using estimator::fail;
using estimator::Result;

class FileDescriptor {
public:
    explicit FileDescriptor(int number) : m_number{number} {}
    FileDescriptor(const FileDescriptor&) = delete;
    FileDescriptor& operator=(const FileDescriptor&) = delete;
    ~FileDescriptor() {
        if (m_number >= 0) {
            ::close(m_number);
        }
    }
    [[nodiscard]] int number() const noexcept { return m_number; }

private:
    int m_number;
};

Error system_error(const std::filesystem::path& file, int error_number) {
    const std::string name = file.string();
    switch (error_number) {
    case ENOENT:
    case ENOTDIR:
        return {ErrorCode::not_found, name + ": there is no such file"};
    case EACCES:
    case EPERM:
        return {ErrorCode::no_permission,
                name + ": may not be read by this user; see its permissions with ls -l"};
    default:
        return {ErrorCode::io,
                name + ": cannot be read: " + std::generic_category().message(error_number)};
    }
}

/// Nothing when the path names a regular file.
Result<void> check_kind(const std::filesystem::path& file, const struct stat& status) {
    const char* kind = nullptr;
    if (S_ISREG(status.st_mode)) {
        return {};
    }
    if (S_ISDIR(status.st_mode)) {
        kind = "a folder";
    } else if (S_ISFIFO(status.st_mode)) {
        kind = "a named pipe";
    } else if (S_ISSOCK(status.st_mode)) {
        kind = "a socket";
    } else {
        kind = "a device";
    }
    return fail(ErrorCode::bad_format,
                file.string() + ": is " + kind + ", but must be a text file");
}

Result<std::string> read_all(int descriptor, const std::filesystem::path& file) {
    std::string text;
    std::array<char, 16384> buffer{};
    while (text.size() <= k_max_text_bytes) {
        const ssize_t got = ::read(descriptor, buffer.data(), buffer.size());
        if (got < 0) {
            const int error_number = errno;
            if (error_number == EINTR) {
                continue;
            }
            return tl::unexpected{system_error(file, error_number)};
        }
        if (got == 0) {
            return text;
        }
        text.append(buffer.data(), static_cast<std::size_t>(got));
    }
    return fail(ErrorCode::bad_format, file.string() + ": is larger than " +
                                           std::to_string(k_max_text_bytes >> 20) +
                                           " MiB, the most this file may hold");
}

/// Length of the UTF-8 sequence at `offset`, or 0 when there is none. Rejects overlong forms,
/// surrogates and values above U+10FFFF. Source: RFC 3629, section 4.
std::size_t sequence_length(std::string_view text, std::size_t offset) noexcept {
    const auto byte = [&](std::size_t i) -> std::uint8_t {
        return offset + i < text.size() ? static_cast<std::uint8_t>(text[offset + i]) : 0;
    };
    const auto continues = [&](std::size_t i, std::uint8_t low = 0x80, std::uint8_t high = 0xBF) {
        return byte(i) >= low && byte(i) <= high;
    };
    const std::uint8_t first = byte(0);
    if (first < 0x80) {
        return 1;
    }
    if (first >= 0xC2 && first <= 0xDF) {
        return continues(1) ? 2 : 0;
    }
    if (first >= 0xE0 && first <= 0xEF) {
        const std::uint8_t low = first == 0xE0 ? 0xA0 : 0x80;
        const std::uint8_t high = first == 0xED ? 0x9F : 0xBF;
        return continues(1, low, high) && continues(2) ? 3 : 0;
    }
    if (first >= 0xF0 && first <= 0xF4) {
        const std::uint8_t low = first == 0xF0 ? 0x90 : 0x80;
        const std::uint8_t high = first == 0xF4 ? 0x8F : 0xBF;
        return continues(1, low, high) && continues(2) && continues(3) ? 4 : 0;
    }
    return 0;
}

bool is_control(char character) noexcept {
    const auto byte = static_cast<std::uint8_t>(character);
    return (byte < 0x20 && character != '\t' && character != '\n' && character != '\r') ||
           byte == 0x7F;
}

std::string hexadecimal(char character) {
    std::array<char, 8> text{};
    std::snprintf(text.data(), text.size(), "0x%02X",
                  static_cast<unsigned>(static_cast<std::uint8_t>(character)));
    return text.data();
}

} // namespace

Position position_of(std::string_view text, std::size_t offset) noexcept {
    const std::string_view before = text.substr(0, offset);
    const auto lines = std::count(before.begin(), before.end(), '\n');
    const std::size_t line_end = before.rfind('\n');
    const std::string_view line =
        line_end == std::string_view::npos ? before : before.substr(line_end + 1);
    // Every character has exactly one byte that does not continue another.
    const auto characters = std::count_if(line.begin(), line.end(), [](char c) {
        return (static_cast<std::uint8_t>(c) & 0xC0) != 0x80;
    });
    return {static_cast<std::size_t>(lines) + 1, static_cast<std::size_t>(characters) + 1};
}

std::string place(const std::filesystem::path& file, Position position) {
    return file.string() + ":" + std::to_string(position.line) + ":" +
           std::to_string(position.column);
}

Result<std::string> read_text_file(const std::filesystem::path& file) {
    struct stat status {};
    // Asked before opening, since opening a device can already do something.
    if (::stat(file.c_str(), &status) != 0) {
        return tl::unexpected{system_error(file, errno)};
    }
    if (const auto checked = check_kind(file, status); !checked) {
        return tl::unexpected{checked.error()};
    }
    const FileDescriptor descriptor{
        ::open(file.c_str(), O_RDONLY | O_CLOEXEC | O_NONBLOCK | O_NOCTTY)};
    if (descriptor.number() < 0) {
        return tl::unexpected{system_error(file, errno)};
    }
    // Asked again, since the path may name something else by now.
    if (::fstat(descriptor.number(), &status) != 0) {
        return tl::unexpected{system_error(file, errno)};
    }
    if (const auto checked = check_kind(file, status); !checked) {
        return tl::unexpected{checked.error()};
    }
    return read_all(descriptor.number(), file);
}

Result<void> check_text(std::string_view text, const std::filesystem::path& file) {
    for (std::size_t offset = 0; offset < text.size();) {
        const std::size_t length = sequence_length(text, offset);
        if (length == 0) {
            return fail(ErrorCode::bad_format, place(file, position_of(text, offset)) + ": byte " +
                                                   hexadecimal(text[offset]) +
                                                   " is not UTF-8; save the file in that encoding");
        }
        if (is_control(text[offset])) {
            return fail(ErrorCode::bad_format,
                        place(file, position_of(text, offset)) + ": control character " +
                            hexadecimal(text[offset]) + " does not belong in a text file");
        }
        offset += length;
    }
    return {};
}

} // namespace sagitta::config
