// What was noticed while reading a recording: one sentence a kind, with the first place and a
// count.
#pragma once

#include "input/packet.hpp"

#include <cstdint>
#include <map>
#include <string>
#include <vector>

namespace sagitta::input {

class Remarks {
public:
    /// Counts a broken thing. @param kind  what, in the plural, e.g. "lines that are no event"
    /// @param where  the place, e.g. "line 17"; kept for the first of a kind
    void count(const std::string& kind, const std::string& where);
    /// A remark that comes once.
    void say(std::string sentence);

    /// @param pointers  the assemblers whose losses are told too
    [[nodiscard]] std::vector<std::string>
    sentences(std::span<const PacketAssembler> pointers) const;

private:
    struct Counted {
        std::uint64_t count = 0;
        std::string first;
    };
    std::map<std::string, Counted> m_counted;
    std::vector<std::string> m_said;
};

} // namespace sagitta::input
