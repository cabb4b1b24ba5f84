// How functions report that they could not do what was asked: a closed code for the caller to act
// on, and one sentence for the person: what, where, why and what to do next.
#pragma once

#include <string>
#include <tl/expected.hpp>
#include <utility>

namespace sagitta::estimator {

enum class ErrorCode {
    not_found,     ///< the file, pointer or row is not there
    no_permission, ///< the system refused access
    bad_format,    ///< the content is not what it must be
    bad_value,     ///< a value is out of its range or of the wrong type
    too_few,       ///< not enough data for an honest answer
    newer_version, ///< written by a later version of this program
    damaged,       ///< a file that was ours is broken
    busy,          ///< locked by another process
    no_space,      ///< the disk or quota is full
    already_there, ///< would store the same thing twice
    io             ///< any other failure of the system
};

struct Error {
    ErrorCode code;
    std::string message; ///< one sentence, no trailing newline
};

template <class T>
using Result = tl::expected<T, Error>;

[[nodiscard]] inline tl::unexpected<Error> fail(ErrorCode code, std::string message) {
    return tl::unexpected<Error>{Error{code, std::move(message)}};
}

} // namespace sagitta::estimator
