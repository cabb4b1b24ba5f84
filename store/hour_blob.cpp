#include "store/hour_blob.hpp"

#include <bit>
#include <cstdint>
#include <limits>

namespace sagitta::store {

using estimator::LogHistogram;
using estimator::Moments;

namespace {

constexpr std::byte k_layout{1};

void put_varint(Bytes& bytes, std::uint64_t value) {
    while (value >= 0x80) {
        bytes.push_back(static_cast<std::byte>((value & 0x7f) | 0x80));
        value >>= 7U;
    }
    bytes.push_back(static_cast<std::byte>(value));
}

void put_double(Bytes& bytes, double value) {
    const auto bits = std::bit_cast<std::uint64_t>(value);
    for (unsigned shift = 0; shift < 64; shift += 8) {
        bytes.push_back(static_cast<std::byte>(bits >> shift));
    }
}

void put_moments(Bytes& bytes, const Moments& moments) {
    put_varint(bytes, moments.n);
    if (moments.n > 0) {
        put_double(bytes, moments.mean);
        put_double(bytes, moments.m2);
    }
}

/// Reads on past the end as zeros and remembers that it did.
class Reader {
public:
    explicit Reader(std::span<const std::byte> bytes) : m_bytes{bytes} {}

    [[nodiscard]] bool at_end() const { return m_bytes.empty(); }
    [[nodiscard]] bool valid() const { return m_valid; }

    std::uint64_t byte() {
        if (m_bytes.empty()) {
            m_valid = false;
            return 0;
        }
        const auto value = std::to_integer<std::uint64_t>(m_bytes.front());
        m_bytes = m_bytes.subspan(1);
        return value;
    }
    std::uint64_t varint() {
        std::uint64_t value = 0;
        for (unsigned shift = 0; shift < 64; shift += 7) {
            const auto next = byte();
            value |= (next & 0x7f) << shift;
            if ((next & 0x80) == 0) {
                return value;
            }
        }
        m_valid = false;
        return 0;
    }
    double number() {
        std::uint64_t bits = 0;
        for (unsigned shift = 0; shift < 64; shift += 8) {
            bits |= byte() << shift;
        }
        return std::bit_cast<double>(bits);
    }
    Moments moments() {
        Moments moments;
        moments.n = varint();
        if (moments.n > 0) {
            moments.mean = number();
            moments.m2 = number();
        }
        return moments;
    }

private:
    std::span<const std::byte> m_bytes;
    bool m_valid = true;
};

} // namespace

Bytes encode(const LogHistogram& histogram) {
    Bytes bytes{k_layout};
    std::uint64_t skipped = 0;
    for (const auto count : histogram.bins) {
        if (count == 0) {
            ++skipped;
            continue;
        }
        put_varint(bytes, skipped);
        put_varint(bytes, count);
        skipped = 0;
    }
    return bytes;
}

std::optional<LogHistogram> decode_histogram(std::span<const std::byte> bytes) {
    Reader reader{bytes};
    if (reader.byte() != std::to_integer<std::uint64_t>(k_layout)) {
        return std::nullopt;
    }
    LogHistogram histogram;
    std::size_t bin = 0;
    while (!reader.at_end()) {
        const auto skipped = reader.varint();
        const auto count = reader.varint();
        if (!reader.valid() || skipped >= histogram.bins.size() - bin ||
            count > std::numeric_limits<std::uint32_t>::max()) {
            return std::nullopt;
        }
        bin += static_cast<std::size_t>(skipped);
        histogram.bins[bin++] = static_cast<std::uint32_t>(count);
    }
    return histogram;
}

Bytes encode(const Sectors& sectors) {
    Bytes bytes{k_layout};
    for (const auto& sector : sectors) {
        put_moments(bytes, sector.offset_share);
        put_moments(bytes, sector.initial_angle_deg);
    }
    return bytes;
}

std::optional<Sectors> decode_sectors(std::span<const std::byte> bytes) {
    Reader reader{bytes};
    if (reader.byte() != std::to_integer<std::uint64_t>(k_layout)) {
        return std::nullopt;
    }
    Sectors sectors{};
    for (auto& sector : sectors) {
        sector.offset_share = reader.moments();
        sector.initial_angle_deg = reader.moments();
    }
    return reader.valid() && reader.at_end() ? std::optional{sectors} : std::nullopt;
}

} // namespace sagitta::store
