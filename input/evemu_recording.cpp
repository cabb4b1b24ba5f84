// evemu text. Grammar: a header of N: (name), I: (ids), P: (properties), B: (capabilities, 64 bits
// a line, least significant first) and A: (axes), then E: sec.usec type code value, type and code
// in hex, value in decimal. Source: evemu.c as published, and files of evemu-record 3.0.

#include "input/device_facts.hpp"
#include "input/line_reader.hpp"
#include "input/packet.hpp"
#include "input/recording_formats.hpp"
#include "input/remarks.hpp"
#include "input/text_fields.hpp"

namespace sagitta::input {

namespace {

using estimator::PointerIndex;

constexpr std::size_t k_batch_events = 4096;

template <std::size_t Bits>
void set_byte(std::bitset<Bits>& bits, std::size_t first, std::uint8_t byte) {
    for (std::size_t i = 0; i < 8; ++i)
        if (first + i < Bits && ((unsigned{byte} >> i) & 1U) != 0)
            bits.set(first + i);
}

/// The header of a recording, line by line.
class EvemuHeader {
public:
    /// @return false for a line that is no header line
    bool take(std::string_view line) {
        if (line.size() < 2 || line[1] != ':')
            return false;
        TextFields fields{line.substr(2)};
        switch (line[0]) {
        case 'N':
            m_facts.name = std::string{fields.rest()};
            return true;
        case 'I':
            return take_ids(fields);
        case 'P':
            return take_bits(fields, m_facts.can.properties, m_property_bytes);
        case 'B':
            return take_capabilities(fields);
        case 'A':
            return take_axis(fields);
        case 'L':
        case 'S':
            return true; // lamps and switches
        default:
            return false;
        }
    }

    /// At least one B: line was there.
    [[nodiscard]] bool has_capabilities() const {
        return m_key_bytes + m_relative_bytes + m_absolute_bytes > 0;
    }

    [[nodiscard]] DeviceFacts facts() const {
        DeviceFacts facts = m_facts;
        if (m_x_per_mm > 0 && m_y_per_mm > 0)
            facts.resolution = estimator::AxisResolution{m_x_per_mm, m_y_per_mm};
        return facts;
    }

private:
    bool take_ids(TextFields& fields) {
        const auto bus = fields.hex(), vendor = fields.hex(), product = fields.hex();
        if (!bus || !vendor || !product || *bus > 0xffff || *vendor > 0xffff || *product > 0xffff)
            return false;
        m_facts.bus = static_cast<std::uint16_t>(*bus);
        m_facts.vendor = static_cast<std::uint16_t>(*vendor);
        m_facts.product = static_cast<std::uint16_t>(*product);
        return true;
    }

    template <std::size_t Bits>
    static bool take_bits(TextFields& fields, std::bitset<Bits>& bits, std::size_t& bytes) {
        while (!fields.at_end()) {
            const auto byte = fields.hex();
            if (!byte || *byte > 0xff)
                return false;
            set_byte(bits, 8 * bytes++, static_cast<std::uint8_t>(*byte));
        }
        return true;
    }

    bool take_capabilities(TextFields& fields) {
        const auto type = fields.hex();
        if (!type)
            return false;
        switch (*type) {
        case EV_KEY:
            return take_bits(fields, m_facts.can.keys, m_key_bytes);
        case EV_REL:
            return take_bits(fields, m_facts.can.relative, m_relative_bytes);
        case EV_ABS:
            return take_bits(fields, m_facts.can.absolute, m_absolute_bytes);
        default:
            return true;
        }
    }

    bool take_axis(TextFields& fields) {
        const auto code = fields.hex();
        for (int i = 0; i < 4; ++i) // minimum, maximum, fuzz, flat
            if (!fields.decimal())
                return false;
        const auto resolution = fields.decimal(); // not before format 1.2
        if (code && *code == ABS_X)
            m_x_per_mm = static_cast<double>(resolution.value_or(0));
        if (code && *code == ABS_Y)
            m_y_per_mm = static_cast<double>(resolution.value_or(0));
        return code.has_value();
    }

    DeviceFacts m_facts;
    std::size_t m_property_bytes = 0, m_key_bytes = 0, m_relative_bytes = 0, m_absolute_bytes = 0;
    double m_x_per_mm = 0.0, m_y_per_mm = 0.0;
};

/// "sec.usec type code value", comments after it ignored.
std::optional<input_event> parse_event(std::string_view text) {
    TextFields fields{text};
    const auto stamp = fields.stamp();
    const auto type = fields.hex();
    const auto code = fields.hex();
    const auto value = fields.decimal();
    if (!stamp || !type || !code || !value || *type > EV_MAX || *code > KEY_MAX)
        return std::nullopt;
    input_event event{};
    event.input_event_sec = stamp->seconds;
    event.input_event_usec = stamp->microseconds;
    event.type = static_cast<std::uint16_t>(*type);
    event.code = static_cast<std::uint16_t>(*code);
    event.value = *value;
    return event;
}

class EvemuRecording final : public Recording {
public:
    explicit EvemuRecording(RecordingFile file)
        : m_path{file.path}, m_lines{std::move(file.file), std::move(file.path)} {
        m_events.reserve(k_batch_events);
    }

    /// Reads the header. @return bad_format when the device is no pointer; io
    estimator::Result<void> open() {
        EvemuHeader header;
        while (true) {
            const auto line = m_lines.next();
            if (!line)
                return tl::unexpected{line.error()};
            if (!*line)
                break;
            const std::string_view text = (*line)->text;
            if (is_event(text)) {
                m_first_event = std::string{text};
                m_first_event_line = **line;
                break;
            }
            if (!is_comment(text) && !header.take(text))
                m_remarks.count("broken header lines", place(**line));
        }
        return begin(header);
    }

    estimator::Result<void> next(estimator::ReportBatch& batch) override {
        batch.clear();
        if (m_first_event) {
            m_first_event_line.text = *m_first_event;
            take(m_first_event_line, batch);
            m_first_event.reset();
        }
        while (batch.empty() && !m_at_end) {
            const auto line = m_lines.next();
            if (!line)
                return tl::unexpected{line.error()};
            if (*line) {
                take(**line, batch);
                continue;
            }
            flush(batch);
            if (const auto ended = end(); !ended)
                return ended;
        }
        return {};
    }

    std::span<const estimator::PointerDescription> pointers() const override { return m_pointers; }
    RecordingFormat format() const override { return RecordingFormat::evemu; }
    std::vector<std::string> remarks() const override { return m_remarks.sentences(m_assemblers); }
    estimator::PointerTime first_stamp() const override { return m_first_stamp; }

private:
    static bool is_event(std::string_view text) { return text.starts_with("E:"); }
    static bool is_comment(std::string_view text) {
        return trimmed(text).empty() || text.front() == '#';
    }
    static std::string place(const Line& line) { return "line " + std::to_string(line.number); }

    estimator::Result<void> begin(const EvemuHeader& header) {
        auto facts = header.facts();
        std::optional<estimator::PointerDescription> pointer;
        if (header.has_capabilities()) {
            pointer = describe(facts, estimator::Origin::recording);
            if (is_keyboard(facts))
                pointer.reset();
        } else {
            pointer = estimator::PointerDescription{};
            pointer->name = clean_name(facts.name);
            pointer->origin = estimator::Origin::recording;
            m_remarks.say("the header does not say what the device can do, taken as a mouse");
        }
        if (!pointer)
            return estimator::fail(estimator::ErrorCode::bad_format,
                                   shown(m_path) + " was recorded from '" + clean_name(facts.name) +
                                       "', which is no pointer; record the pointer instead");
        m_assemblers.emplace_back(PointerIndex{0}, pointer->kind);
        m_pointers.push_back(std::move(*pointer));
        return {};
    }

    void take(const Line& line, estimator::ReportBatch& batch) {
        if (!line.too_long && is_comment(line.text))
            return;
        if (!line.too_long && is_event(line.text)) {
            if (const auto event = parse_event(line.text.substr(2))) {
                if (m_valid_events++ == 0)
                    m_first_stamp =
                        estimator::PointerTime{std::chrono::seconds{event->input_event_sec} +
                                               estimator::Micros{event->input_event_usec}};
                m_events.push_back(*event);
                if (m_events.size() == k_batch_events)
                    flush(batch);
                return;
            }
        }
        ++m_broken_lines;
        if (line.is_cut)
            m_remarks.say("the file is cut in " + place(line) + ", that line is left out");
        else
            m_remarks.count("lines that are no event", place(line));
        flush(batch);
        m_assemblers[0].lose();
    }

    void flush(estimator::ReportBatch& batch) {
        m_assemblers[0].add(m_events, batch);
        m_events.clear();
    }

    estimator::Result<void> end() {
        m_at_end = true;
        if (m_assemblers[0].mid_packet())
            m_remarks.say("the file ends within a packet, that packet is left out");
        if (m_valid_events == 0 && m_broken_lines > 0)
            return estimator::fail(estimator::ErrorCode::bad_format,
                                   shown(m_path) + " looks like evemu text, but holds no readable "
                                                   "event; record it again");
        if (m_valid_events == 0)
            m_remarks.say("the recording holds no event");
        return {};
    }

    std::filesystem::path m_path;
    LineReader m_lines;
    std::optional<std::string> m_first_event; ///< read by open(), not yet taken
    Line m_first_event_line{};
    std::vector<input_event> m_events; ///< not yet assembled
    std::vector<PacketAssembler> m_assemblers;
    std::vector<estimator::PointerDescription> m_pointers;
    Remarks m_remarks;
    std::uint64_t m_valid_events = 0, m_broken_lines = 0;
    estimator::PointerTime m_first_stamp{};
    bool m_at_end = false;
};

} // namespace

bool looks_like_evemu(std::string_view head) {
    while (!head.empty()) {
        const std::size_t end = head.find('\n');
        const std::string_view line = head.substr(0, end);
        head.remove_prefix(end == std::string_view::npos ? head.size() : end + 1);
        if (line.starts_with("# EVEMU"))
            return true;
        if (trimmed(line).empty() || line.front() == '#')
            continue;
        return line.starts_with("N: ") || line.starts_with("I: ") || line.starts_with("E: ");
    }
    return false;
}

OpenedRecording open_evemu(RecordingFile file) {
    auto recording = std::make_unique<EvemuRecording>(std::move(file));
    if (const auto opened = recording->open(); !opened)
        return tl::unexpected{opened.error()};
    return recording;
}

} // namespace sagitta::input
