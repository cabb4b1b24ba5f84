#include "tests/guest/packets.hpp"

#include <algorithm>
#include <cstdlib>
#include <cstring>
#include <fstream>
#include <iterator>
#include <limits>
#include <linux/input.h>
#include <stdexcept>

namespace sagitta::guest {

std::vector<Packet> packets_of(std::string_view bytes) {
    std::vector<Packet> packets;
    Packet packet{};
    bool has_content = false;
    for (std::size_t at = 0; at + sizeof(input_event) <= bytes.size(); at += sizeof(input_event)) {
        input_event event{};
        std::memcpy(&event, bytes.data() + at, sizeof event);
        if (event.type == EV_SYN && event.code == SYN_DROPPED) {
            return {};
        }
        if (event.type == EV_SYN && event.code == SYN_REPORT) {
            packet.time_us = event.input_event_sec * 1'000'000 + event.input_event_usec;
            if (has_content) {
                packets.push_back(packet);
            }
            packet.dx = packet.dy = 0;
            has_content = false;
        } else if (event.type == EV_REL && event.code == REL_X) {
            packet.dx += event.value;
            packet.x += event.value;
            has_content = true;
        } else if (event.type == EV_REL && event.code == REL_Y) {
            packet.dy += event.value;
            packet.y += event.value;
            has_content = true;
        } else if (event.type == EV_KEY) {
            packet.edges += 1;
            packet.left_down = event.value != 0;
            has_content = true;
        }
    }
    return packets;
}

std::string read_file(const std::string& file) {
    std::ifstream stream{file, std::ios::binary};
    if (!stream) {
        throw std::runtime_error{"cannot read " + file};
    }
    return {std::istreambuf_iterator<char>{stream}, {}};
}

std::vector<Delay> delays(const std::vector<Packet>& planned, const std::vector<Packet>& seen) {
    std::vector<Delay> found;
    auto next = planned.begin();
    for (const Packet& packet : seen) {
        next = std::find_if(next, planned.end(), [&](const Packet& sent) {
            return sent.x == packet.x && sent.y == packet.y && sent.edges == packet.edges;
        });
        if (next == planned.end()) {
            throw std::runtime_error{"packet " + std::to_string(found.size() + 1) +
                                     " of the kernel is on no place of the path that was sent"};
        }
        found.push_back({next->time_us, packet.time_us - next->time_us});
        ++next;
    }
    if (planned.empty() || next != planned.end()) {
        throw std::runtime_error{"the kernel did not report the end of the path that was sent"};
    }
    return found;
}

std::int64_t jitter_us(const std::vector<Delay>& delays, std::int64_t from_us, std::int64_t to_us) {
    bool any = false;
    std::int64_t low = 0;
    std::int64_t high = 0;
    for (const Delay& delay : delays) {
        if (delay.planned_us < from_us || delay.planned_us > to_us) {
            continue;
        }
        low = any ? std::min(low, delay.delay_us) : delay.delay_us;
        high = any ? std::max(high, delay.delay_us) : delay.delay_us;
        any = true;
    }
    return high - low;
}

std::int64_t stall_us(const std::vector<Packet>& planned, const std::vector<Packet>& seen) {
    constexpr std::int64_t k_most = std::numeric_limits<std::int64_t>::max();
    try {
        const std::vector<Delay> late = delays(planned, seen);
        std::int64_t longest = 0;
        for (std::size_t i = 1; i < late.size(); ++i) {
            longest = std::max(longest, std::abs(late[i].delay_us - late[i - 1].delay_us));
        }
        return longest;
    } catch (const std::runtime_error&) {
        return k_most;
    }
}

} // namespace sagitta::guest
