// libinput-record YAML. Its descriptions of devices are read as YAML; its events, which make up
// nearly all of a file, line by line: an event is always one line, and a broken line then costs
// one packet, not the rest of the file. Source: libinput-record(1), libinput 1.22.

#include "input/libinput_header.hpp"
#include "input/line_reader.hpp"
#include "input/packet.hpp"
#include "input/recording_formats.hpp"
#include "input/remarks.hpp"
#include "input/text_fields.hpp"

#include <algorithm>
#include <array>

namespace sagitta::input {

namespace {

using estimator::ErrorCode;
using estimator::PointerIndex;
using estimator::PointerTime;
using estimator::Report;
using estimator::ReportBatch;

constexpr std::uint64_t k_largest_file = std::uint64_t{64} * 1024 * 1024;
constexpr std::size_t k_largest_header = std::size_t{256} * 1024;
constexpr std::size_t k_batch_reports = 4096;

std::size_t indent_of(std::string_view line) {
    return std::min(line.find_first_not_of(' '), line.size());
}

/// What follows the dash of a list's item; nothing for a line that is no item.
std::optional<std::string_view> item_of(std::string_view text) {
    if (!text.starts_with("- "))
        return std::nullopt;
    return trimmed(text.substr(1));
}

bool is_device(std::string_view text) {
    const auto item = item_of(text);
    return item && item->starts_with("node:");
}

/// "- [sec, usec, type, code, value]", a comment after it ignored.
std::optional<input_event> parse_event(std::string_view text) {
    const std::size_t open = text.find('[');
    const std::size_t close = text.find(']');
    if (open == std::string_view::npos || close == std::string_view::npos || close < open)
        return std::nullopt;
    std::string_view list = text.substr(open + 1, close - open - 1);
    std::array<std::int64_t, 5> numbers{};
    for (std::size_t i = 0; i < numbers.size(); ++i) {
        const bool is_last = i + 1 == numbers.size();
        const std::size_t comma = list.find(',');
        if (is_last != (comma == std::string_view::npos))
            return std::nullopt;
        const auto number = parse_integer(trimmed(list.substr(0, comma)));
        if (!number)
            return std::nullopt;
        numbers[i] = *number;
        if (!is_last)
            list.remove_prefix(comma + 1);
    }
    const auto [seconds, microseconds, type, code, value] = numbers;
    if (seconds < 0 || seconds >= k_seconds_end || microseconds < 0 || microseconds >= 1'000'000 ||
        type < 0 || type > EV_MAX || code < 0 || code > KEY_MAX ||
        value != static_cast<std::int32_t>(value))
        return std::nullopt;
    input_event event{};
    event.input_event_sec = seconds;
    event.input_event_usec = microseconds;
    event.type = static_cast<std::uint16_t>(type);
    event.code = static_cast<std::uint16_t>(code);
    event.value = static_cast<std::int32_t>(value);
    return event;
}

/// What the lines of a file add up to.
struct Content {
    std::vector<estimator::PointerDescription> pointers;
    std::vector<PacketAssembler> assemblers;
    std::vector<ReportBatch> reports; ///< of each pointer
    std::optional<PointerTime> first_stamp;
    Remarks remarks;
};

/// Takes the lines of a file in their order.
class LibinputLines {
public:
    void take(const Line& line) {
        const std::string_view text = trimmed(line.text);
        if (line.too_long) {
            broken(line);
            return;
        }
        if (text.empty() || text.front() == '#')
            return;
        const std::size_t indent = indent_of(line.text);
        if (m_where == Where::before_devices) {
            if (indent == 0 && text.starts_with("devices:"))
                m_where = Where::between_devices;
        } else if (is_device(text)) {
            m_header.assign(line.text);
            m_header_line = line.number;
            m_where = Where::header;
        } else if (m_where == Where::header) {
            take_header(line, text, indent);
        } else if (m_where == Where::events) {
            take_event(line, text, indent);
        }
        if (line.is_cut && m_where == Where::header)
            cut(line);
    }

    /// The file has ended.
    Content finish() {
        if (m_where == Where::header)
            m_content.remarks.say("the description of the device in line " +
                                  std::to_string(m_header_line) +
                                  " is not followed by events, that device is left out");
        for (const PacketAssembler& assembler : m_content.assemblers)
            if (assembler.mid_packet())
                m_content.remarks.count("packets without their end", "the end of the events");
        return std::move(m_content);
    }

private:
    enum class Where { before_devices, between_devices, header, events };

    static std::string place(const Line& line) { return "line " + std::to_string(line.number); }

    void take_header(const Line& line, std::string_view text, std::size_t indent) {
        if (text.starts_with("events:")) {
            m_events_indent = indent;
            m_in_evdev = false;
            begin_events();
            return;
        }
        if (m_header.size() + line.text.size() < k_largest_header)
            m_header.append("\n").append(line.text);
    }

    void begin_events() {
        m_where = Where::between_devices;
        const std::string where = "line " + std::to_string(m_header_line);
        const auto facts = read_libinput_header(m_header);
        if (!facts) {
            m_content.remarks.count("devices whose description is broken", where);
            return;
        }
        auto pointer = describe(*facts, estimator::Origin::recording);
        if (!pointer || is_keyboard(*facts)) {
            m_content.remarks.count("devices that are no pointer", where);
            return;
        }
        const std::size_t index = m_content.pointers.size();
        if (index == estimator::k_max_pointers) {
            m_content.remarks.count("pointers beyond 256", where);
            return;
        }
        m_content.assemblers.emplace_back(static_cast<PointerIndex>(index), pointer->kind);
        m_content.pointers.push_back(std::move(*pointer));
        m_content.reports.emplace_back();
        m_where = Where::events;
    }

    void take_event(const Line& line, std::string_view text, std::size_t indent) {
        const auto item = item_of(text);
        if (indent < m_events_indent || (indent == m_events_indent && !item)) {
            m_where = Where::between_devices;
        } else if (item && item->starts_with("evdev:")) {
            m_in_evdev = true;
        } else if (item && !item->starts_with("[")) {
            m_in_evdev = false; // what libinput or the HID layer made of it
            if (line.is_cut)
                cut(line);
        } else if (m_in_evdev) {
            if (const auto event = parse_event(text))
                assemble(*event);
            else
                broken(line);
        }
    }

    void assemble(const input_event& event) {
        const PointerTime stamp{std::chrono::seconds{event.input_event_sec} +
                                estimator::Micros{event.input_event_usec}};
        m_content.first_stamp = std::min(m_content.first_stamp.value_or(stamp), stamp);
        m_content.assemblers.back().add(std::span{&event, 1}, m_content.reports.back());
    }

    void broken(const Line& line) {
        if (line.is_cut)
            cut(line);
        else
            m_content.remarks.count("lines that are no event", place(line));
        if (m_where == Where::events)
            m_content.assemblers.back().lose();
    }

    void cut(const Line& line) {
        m_content.remarks.say("the file is cut in " + place(line) + ", that line is left out");
    }

    Content m_content;
    Where m_where = Where::before_devices;
    std::string m_header;
    std::uint64_t m_header_line = 0;
    std::size_t m_events_indent = 0;
    bool m_in_evdev = false;
};

class LibinputRecording final : public Recording {
public:
    explicit LibinputRecording(Content content)
        : m_content{std::move(content)}, m_delivered(m_content.reports.size(), 0) {}

    estimator::Result<void> next(ReportBatch& batch) override {
        batch.clear();
        while (batch.size() < k_batch_reports) {
            const Report* report = take_oldest();
            if (report == nullptr)
                break;
            batch.push_back(*report);
        }
        return {};
    }

    std::span<const estimator::PointerDescription> pointers() const override {
        return m_content.pointers;
    }
    RecordingFormat format() const override { return RecordingFormat::libinput_record; }
    std::vector<std::string> remarks() const override {
        return m_content.remarks.sentences(m_content.assemblers);
    }
    PointerTime first_stamp() const override {
        return m_content.first_stamp.value_or(PointerTime{});
    }

private:
    /// The next report in the order of time; nullptr when all are delivered.
    const Report* take_oldest() {
        const Report* oldest = nullptr;
        std::size_t from = 0;
        for (std::size_t i = 0; i < m_delivered.size(); ++i) {
            if (m_delivered[i] == m_content.reports[i].size())
                continue;
            const Report& candidate = m_content.reports[i][m_delivered[i]];
            if (oldest == nullptr || candidate.time < oldest->time) {
                oldest = &candidate;
                from = i;
            }
        }
        if (oldest != nullptr)
            ++m_delivered[from];
        return oldest;
    }

    Content m_content;
    std::vector<std::size_t> m_delivered; ///< reports of each pointer
};

} // namespace

bool looks_like_libinput_record(std::string_view head) {
    bool version = false;
    while (!head.empty()) {
        const std::size_t end = head.find('\n');
        const std::string_view line = head.substr(0, end);
        head.remove_prefix(end == std::string_view::npos ? head.size() : end + 1);
        version = version || line.starts_with("version:");
        if (version && line.starts_with("devices:"))
            return true;
    }
    return false;
}

OpenedRecording open_libinput_record(RecordingFile file) {
    const std::string name = shown(file.path);
    if (file.size > k_largest_file)
        return estimator::fail(ErrorCode::bad_format,
                               name + " is larger than 64 MiB, too large for libinput-record text; "
                                      "record with `sagitta record` instead");
    LineReader lines{std::move(file.file), file.path};
    LibinputLines content;
    while (true) {
        const auto line = lines.next();
        if (!line)
            return tl::unexpected{line.error()};
        if (!*line)
            break;
        content.take(**line);
    }
    Content found = content.finish();
    if (found.pointers.empty())
        return estimator::fail(ErrorCode::bad_format,
                               name + " holds no pointer with events; libinput-record must be "
                                      "told the node of a mouse, trackball or touchpad");
    return std::make_unique<LibinputRecording>(std::move(found));
}

} // namespace sagitta::input
