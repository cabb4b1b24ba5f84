#include "input/remarks.hpp"

namespace sagitta::input {

namespace {

void tell(std::vector<std::string>& sentences, std::uint64_t count, const std::string& what) {
    if (count > 0)
        sentences.push_back(what + ": " + std::to_string(count));
}

} // namespace

void Remarks::count(const std::string& kind, const std::string& where) {
    Counted& counted = m_counted[kind];
    if (counted.count++ == 0)
        counted.first = where;
}

void Remarks::say(std::string sentence) {
    m_said.push_back(std::move(sentence));
}

std::vector<std::string> Remarks::sentences(std::span<const PacketAssembler> pointers) const {
    std::vector<std::string> all = m_said;
    for (const auto& [kind, counted] : m_counted)
        all.push_back(kind + ", skipped: " + std::to_string(counted.count) + ", the first at " +
                      counted.first);
    std::uint64_t drops = 0;
    std::uint64_t reversed = 0;
    std::uint64_t impossible = 0;
    for (const PacketAssembler& pointer : pointers) {
        drops += pointer.drops();
        reversed += pointer.reversed_stamps();
        impossible += pointer.impossible_deltas();
    }
    tell(all, drops, "places where the kernel lost events while recording (SYN_DROPPED)");
    tell(all, reversed, "stamps that ran backwards or were no time, taken as losses");
    tell(all, impossible, "packets that moved by more than 32767 counts, their motion left out");
    return all;
}

} // namespace sagitta::input
