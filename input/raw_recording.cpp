// Raw streams of struct input_event, as `cat /dev/input/eventN` or `sagitta record` make them.

#include "input/device_facts.hpp"
#include "input/packet.hpp"
#include "input/recording_formats.hpp"
#include "input/remarks.hpp"

#include <array>
#include <cstring>

namespace sagitta::input {

namespace {

using estimator::PointerIndex;
using estimator::PointerKind;

constexpr std::size_t k_event = sizeof(input_event);
// Read size: large enough to forget the system call, small enough to stay in a core's cache.
constexpr std::size_t k_buffer_events = 8192;

std::vector<input_event> events_in(std::string_view head) {
    std::vector<input_event> events(head.size() / k_event);
    if (!events.empty())
        std::memcpy(events.data(), head.data(), events.size() * k_event);
    return events;
}

std::uint16_t last_code(std::uint16_t type) {
    switch (type) {
    case EV_SYN:
        return SYN_MAX;
    case EV_KEY:
        return KEY_MAX;
    case EV_REL:
        return REL_MAX;
    case EV_ABS:
        return ABS_MAX;
    case EV_MSC:
        return MSC_MAX;
    case EV_SW:
        return SW_MAX;
    case EV_LED:
        return LED_MAX;
    case EV_SND:
        return SND_MAX;
    case EV_REP:
        return REP_MAX;
    default:
        return type <= EV_MAX ? 0x7f : 0;
    }
}

bool is_plausible(const input_event& event) {
    return event.type <= EV_MAX && event.code <= last_code(event.type) &&
           static_cast<std::uint64_t>(event.input_event_sec) <
               static_cast<std::uint64_t>(k_seconds_end) &&
           static_cast<std::uint64_t>(event.input_event_usec) < 1'000'000;
}

/// A raw stream does not say what sent it; its first events do.
PointerKind kind_of(std::string_view head) {
    bool places = false;
    bool steps = false;
    bool finger = false;
    for (const input_event& event : events_in(head)) {
        places = places || (event.type == EV_ABS && (event.code == ABS_X || event.code == ABS_Y));
        steps = steps || (event.type == EV_REL && (event.code == REL_X || event.code == REL_Y));
        finger = finger || (event.type == EV_KEY && event.code == BTN_TOOL_FINGER);
    }
    if (!places || steps)
        return PointerKind::mouse;
    return finger ? PointerKind::touchpad : PointerKind::absolute;
}

class RawRecording final : public Recording {
public:
    RawRecording(RecordingFile file, PointerKind kind)
        : m_file{std::move(file.file)}, m_path{std::move(file.path)},
          m_buffer(k_buffer_events), m_assemblers{PacketAssembler{PointerIndex{0}, kind}} {
        m_pointers[0].name = clean_name(m_path.stem().string());
        m_pointers[0].kind = kind;
        m_pointers[0].origin = estimator::Origin::recording;
    }

    estimator::Result<void> next(estimator::ReportBatch& batch) override {
        batch.clear();
        while (batch.empty() && !m_at_end) {
            const auto bytes =
                read_full(m_file.get(), std::as_writable_bytes(std::span{m_buffer}), m_path);
            if (!bytes)
                return tl::unexpected{bytes.error()};
            const std::size_t events = *bytes / k_event;
            if (m_events_read == 0 && events > 0)
                m_first = estimator::PointerTime{std::chrono::seconds{m_buffer[0].input_event_sec} +
                                                 estimator::Micros{m_buffer[0].input_event_usec}};
            m_assemblers[0].add(std::span{m_buffer}.first(events), batch);
            m_events_read += events;
            if (*bytes < m_buffer.size() * k_event)
                end(*bytes % k_event);
        }
        return {};
    }

    std::span<const estimator::PointerDescription> pointers() const override { return m_pointers; }
    RecordingFormat format() const override { return RecordingFormat::raw; }
    std::vector<std::string> remarks() const override { return m_remarks.sentences(m_assemblers); }
    estimator::PointerTime first_stamp() const override { return m_first; }

private:
    void end(std::size_t cut_bytes) {
        m_at_end = true;
        if (cut_bytes > 0)
            m_remarks.say("the last event is cut at byte " +
                          std::to_string(m_events_read * k_event + cut_bytes) + ", " +
                          std::to_string(cut_bytes) + " bytes skipped");
        if (m_assemblers[0].mid_packet())
            m_remarks.say("the file ends within a packet at byte " +
                          std::to_string(m_events_read * k_event) + ", that packet is left out");
    }

    Descriptor m_file;
    std::filesystem::path m_path;
    std::vector<input_event> m_buffer;
    std::array<PacketAssembler, 1> m_assemblers;
    std::array<estimator::PointerDescription, 1> m_pointers;
    Remarks m_remarks;
    std::uint64_t m_events_read = 0;
    estimator::PointerTime m_first{};
    bool m_at_end = false;
};

} // namespace

bool looks_raw(std::string_view head) {
    constexpr std::size_t k_judged = 8;
    const std::vector<input_event> events = events_in(head);
    std::size_t seen = 0;
    bool says_something = false;
    for (const input_event& event : events) {
        if (seen++ < k_judged && !is_plausible(event))
            return false;
        says_something = says_something || event.type != EV_SYN;
    }
    // A file of zeros would pass for endless empty packets.
    return says_something;
}

OpenedRecording open_raw(RecordingFile file) {
    const PointerKind kind = kind_of(file.head);
    return std::make_unique<RawRecording>(std::move(file), kind);
}

} // namespace sagitta::input
