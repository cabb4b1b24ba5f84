// A file descriptor with an owner, and errors of the system as sentences.
#pragma once

#include "estimator/result.hpp"

#include <cstddef>
#include <filesystem>
#include <span>
#include <string>

namespace sagitta::input {

/// Owns a file descriptor.
class Descriptor {
public:
    explicit Descriptor(int fd) : m_fd{fd} {}
    Descriptor(Descriptor&& other) noexcept : m_fd{other.release()} {}
    Descriptor& operator=(Descriptor&& other) noexcept;
    Descriptor(const Descriptor&) = delete;
    Descriptor& operator=(const Descriptor&) = delete;
    ~Descriptor();

    [[nodiscard]] int get() const { return m_fd; }
    /// Gives up ownership.
    [[nodiscard]] int release();

private:
    int m_fd;
};

/// Reads until `buffer` is full or the file ends.
/// @return bytes read; io, naming `file`
[[nodiscard]] estimator::Result<std::size_t> read_full(int fd, std::span<std::byte> buffer,
                                                       const std::filesystem::path& file);

/// The code that stands for an errno.
[[nodiscard]] estimator::ErrorCode code_of_errno(int error);
/// "No such file or directory" and the like.
[[nodiscard]] std::string text_of_errno(int error);
/// The path as it may stand in a sentence: control characters replaced.
[[nodiscard]] std::string shown(const std::filesystem::path& file);

} // namespace sagitta::input
