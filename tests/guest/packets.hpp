// Raw recordings as the guest test sees them: packets with their place on the cumulative path, so
// that what the kernel reported can be laid beside what was sent.
#pragma once

#include <cstdint>
#include <string>
#include <string_view>
#include <vector>

namespace sagitta::guest {

struct Packet {
    std::int64_t time_us;
    std::int32_t dx, dy; ///< counts
    std::int64_t x, y;   ///< counts since the beginning, this packet included
    int edges;           ///< button edges since the beginning, this packet included
    bool left_down;
};

/// @param bytes  struct input_event records
/// @return nothing when the kernel lost some on the way
[[nodiscard]] std::vector<Packet> packets_of(std::string_view bytes);
[[nodiscard]] std::string read_file(const std::string& file);

/// How late the kernel stamped what was sent at a time of the plan; a constant part is meaningless.
struct Delay {
    std::int64_t planned_us;
    std::int64_t delay_us;
};

/// Lays the kernel's packets beside those planned. Packets that were merged on the way are found by
/// their place on the path.
/// @return one for each packet of the kernel; throws std::runtime_error when a packet was never
///         sent or the path's end was not reached
[[nodiscard]] std::vector<Delay> delays(const std::vector<Packet>& planned,
                                        const std::vector<Packet>& seen);

/// Largest less smallest delay between two times of the plan, us.
[[nodiscard]] std::int64_t jitter_us(const std::vector<Delay>& delays, std::int64_t from_us,
                                     std::int64_t to_us);

/// The longest stall: the largest change of delay from one packet to the next, us; the largest
/// number there is when the kernel's packets are not those planned.
[[nodiscard]] std::int64_t stall_us(const std::vector<Packet>& planned,
                                    const std::vector<Packet>& seen);

} // namespace sagitta::guest
