#include "fixtures.hpp"

#include <algorithm>
#include <ctime>
#include <doctest/doctest.h>
#include <sys/stat.h>
#include <unistd.h>

using namespace sagitta;
using estimator::ErrorCode;
using estimator::Micros;
using estimator::PointerTime;
using input::RecordingFormat;
using tests::event_at;
using tests::syn_at;
using Lines = std::vector<std::string>;

namespace {

/// The 17 events of the two samples, counted from their first.
const std::vector<input_event> k_sample_events{event_at(0, EV_REL, REL_X, 3),
                                               event_at(0, EV_REL, REL_Y, -1),
                                               syn_at(0),
                                               event_at(8'000, EV_REL, REL_X, 5),
                                               syn_at(8'000),
                                               event_at(16'000, EV_REL, REL_X, 4),
                                               event_at(16'000, EV_REL, REL_Y, 2),
                                               syn_at(16'000),
                                               event_at(240'000, EV_MSC, MSC_SCAN, 589825),
                                               event_at(240'000, EV_KEY, BTN_LEFT, 1),
                                               syn_at(240'000),
                                               event_at(320'000, EV_MSC, MSC_SCAN, 589825),
                                               event_at(320'000, EV_KEY, BTN_LEFT, 0),
                                               syn_at(320'000),
                                               event_at(900'000, EV_REL, REL_WHEEL_HI_RES, -120),
                                               event_at(900'000, EV_REL, REL_WHEEL, -1),
                                               syn_at(900'000)};

ErrorCode refused(const std::filesystem::path& file, std::string_view part) {
    const auto opened = input::open_recording(file);
    REQUIRE_FALSE(opened);
    CAPTURE(opened.error().message);
    CHECK(opened.error().message.find(part) != std::string::npos);
    return opened.error().code;
}

const std::string k_evemu_head = "# EVEMU 1.3\nN: Example Mouse\nI: 0003 1234 5678 0111\n";

} // namespace

TEST_CASE("the samples of both text formats give the same reports as their raw form") {
    const tests::TempFolder folder;
    const auto raw = tests::drain(folder.file("mouse.raw", tests::raw_bytes(k_sample_events)));
    REQUIRE(raw);
    CHECK(raw->format == RecordingFormat::raw);
    const Lines expected{"0 us pointer 0 moved 3 -1 wheel 0 pressed 0 released 0",
                         "8000 us pointer 0 moved 5 0 wheel 0 pressed 0 released 0",
                         "16000 us pointer 0 moved 4 2 wheel 0 pressed 0 released 0",
                         "240000 us pointer 0 moved 0 0 wheel 0 pressed 1 released 0",
                         "320000 us pointer 0 moved 0 0 wheel 0 pressed 0 released 1",
                         "900000 us pointer 0 moved 0 0 wheel 120 pressed 0 released 0"};
    CHECK(tests::as_text(raw->reports) == expected);

    const auto evemu = tests::drain(tests::sample("sample_mouse.evemu"));
    REQUIRE(evemu);
    CHECK(evemu->format == RecordingFormat::evemu);
    CHECK(evemu->first_stamp == PointerTime{Micros{1}});
    CHECK(tests::as_text(evemu->reports, evemu->first_stamp) == expected);

    const auto yaml = tests::drain(tests::sample("sample_mouse.libinput-record.yml"));
    REQUIRE(yaml);
    CHECK(yaml->format == RecordingFormat::libinput_record);
    CHECK(tests::as_text(yaml->reports, yaml->first_stamp) == expected);
    CHECK(raw->remarks.empty());
    CHECK(evemu->remarks.empty());
    CHECK(yaml->remarks.empty());
}

TEST_CASE("the samples tell their pointer's name, ids and resolution") {
    for (const char* name : {"sample_mouse.evemu", "sample_mouse.libinput-record.yml"}) {
        const auto drained = tests::drain(tests::sample(name));
        REQUIRE(drained);
        REQUIRE(drained->pointers.size() == 1);
        const estimator::PointerDescription& pointer = drained->pointers[0];
        CHECK(pointer.name == "Example Mouse");
        CHECK(pointer.kind == estimator::PointerKind::mouse);
        CHECK(pointer.origin == estimator::Origin::recording);
        CHECK(pointer.bus == 3);
        CHECK(pointer.vendor == 0x1234);
        CHECK(pointer.product == 0x5678);
    }
    const auto yaml = tests::drain(tests::sample("sample_mouse.libinput-record.yml"));
    REQUIRE(yaml->pointers[0].udev_cpi);
    CHECK(yaml->pointers[0].udev_cpi->value() == 1000.0);
}

TEST_CASE("every sample cut at any byte gives the first reports of the whole, or is refused") {
    const tests::TempFolder folder;
    const std::vector<std::string> samples{
        tests::content_of(tests::sample("sample_mouse.evemu")),
        tests::content_of(tests::sample("sample_mouse.libinput-record.yml")),
        tests::raw_bytes(k_sample_events)};
    for (const std::string& content : samples) {
        const auto whole = tests::drain(folder.file("whole", content));
        REQUIRE(whole);
        const Lines all = tests::as_text(whole->reports);
        const auto file = folder.file("cut", content);
        std::size_t least = all.size();
        for (std::size_t size = content.size(); size-- > 0;) {
            CAPTURE(size);
            REQUIRE(::truncate(file.c_str(), static_cast<off_t>(size)) == 0);
            const auto cut = tests::drain(file);
            const Lines some = cut ? tests::as_text(cut->reports) : Lines{};
            if (!cut)
                CHECK(cut.error().code == ErrorCode::bad_format);
            REQUIRE(some.size() <= least); // a shorter file never gives more
            CHECK(std::equal(some.begin(), some.end(), all.begin()));
            if (size + 1 == content.size())
                CHECK(some.size() + 1 >= all.size()); // the last byte costs one packet at most
            least = some.size();
        }
        CHECK(least == 0);
    }
}

TEST_CASE("what is no recording is refused in one sentence that says what is accepted") {
    const tests::TempFolder folder;
    const std::string_view accepted = "accepted are a raw stream of struct input_event, evemu text "
                                      "and libinput-record YAML";
    std::string noise;
    for (unsigned i = 0, state = 1; i < 5000; ++i) {
        state = state * 1664525u + 1013904223u;
        noise.push_back(static_cast<char>(state >> 24));
    }
    for (const std::string& content :
         {noise, std::string{"x"}, std::string{"# a comment\n"}, std::string(23, '\0'),
          std::string{"rest_ms: 200\npointers: []\n"}, std::string(100'000, 'A'),
          std::string(100'000, '\n'), std::string{"\x7f"} + "ELF" + std::string(500, '\1')})
        CHECK(refused(folder.file("odd", content), accepted) == ErrorCode::bad_format);
}

TEST_CASE("an absent file, an empty one, a folder and a pipe are refused at once") {
    const tests::TempFolder folder;
    CHECK(refused(folder.path() / "none", "No such file") == ErrorCode::not_found);
    CHECK(refused(folder.file("empty", ""), "is empty") == ErrorCode::bad_format);
    CHECK(refused(folder.path(), "is a folder") == ErrorCode::bad_format);
    const auto pipe = folder.path() / "pipe";
    REQUIRE(::mkfifo(pipe.c_str(), 0600) == 0);
    CHECK(refused(pipe, "a pipe") == ErrorCode::bad_format); // no writer, and no hang
    CHECK(refused("/dev/zero", "a device") == ErrorCode::bad_format);
}

TEST_CASE("10 GB of nothing are refused without reading them") {
    const tests::TempFolder folder;
    const auto file = folder.file("sparse.raw", "");
    REQUIRE(::truncate(file.c_str(), off_t{10} * 1000 * 1000 * 1000) == 0);
    const std::clock_t before = std::clock();
    CHECK(refused(file, "is no recording") == ErrorCode::bad_format);
    CHECK(std::clock() - before < CLOCKS_PER_SEC / 2); // of this process, not of the wall
}

TEST_CASE("a raw stream with a cut last event tells the byte and leaves the open packet out") {
    const tests::TempFolder folder;
    std::string bytes = tests::raw_bytes(k_sample_events);
    bytes.resize(bytes.size() - 10);
    const auto drained = tests::drain(folder.file("cut.raw", bytes));
    REQUIRE(drained);
    CHECK(drained->reports.size() == 5);
    CHECK(tests::any_contains(drained->remarks, "the last event is cut at byte 398, 14 bytes"));
    CHECK(tests::any_contains(drained->remarks, "ends within a packet at byte 384"));
}

TEST_CASE("a raw stream longer than the read buffer arrives whole and in order") {
    const tests::TempFolder folder;
    std::vector<input_event> events;
    constexpr int k_packets = 20'000;
    for (int i = 0; i < k_packets; ++i) {
        events.push_back(event_at(i * 1000, EV_REL, REL_X, i % 100 + 1));
        events.push_back(event_at(i * 1000, EV_REL, REL_Y, 1));
        events.push_back(syn_at(i * 1000));
    }
    const auto drained = tests::drain(folder.file("long.raw", tests::raw_bytes(events)));
    REQUIRE(drained);
    REQUIRE(drained->reports.size() == k_packets);
    for (int i = 0; i < k_packets; ++i) {
        const auto& report = drained->reports[static_cast<std::size_t>(i)];
        REQUIRE(report.time == PointerTime{Micros{i * 1000}});
        REQUIRE(report.dx == i % 100 + 1);
    }
    CHECK(drained->remarks.empty());
}

TEST_CASE("a raw stream of a touchpad is read as one") {
    const tests::TempFolder folder;
    const auto drained = tests::drain(folder.file(
        "pad.raw",
        tests::raw_bytes({event_at(1000, EV_KEY, BTN_TOUCH, 1),
                          event_at(1000, EV_KEY, BTN_TOOL_FINGER, 1),
                          event_at(1000, EV_ABS, ABS_X, 500), event_at(1000, EV_ABS, ABS_Y, 500),
                          syn_at(1000), event_at(2000, EV_ABS, ABS_X, 507), syn_at(2000)})));
    REQUIRE(drained);
    CHECK(drained->pointers[0].kind == estimator::PointerKind::touchpad);
    CHECK(tests::as_text(drained->reports) ==
          Lines{"2000 us pointer 0 moved 7 0 wheel 0 pressed 0 released 0"});
}

TEST_CASE("losses inside a recording are counted in its remarks") {
    const tests::TempFolder folder;
    const auto drained = tests::drain(folder.file(
        "rough.raw", tests::raw_bytes({event_at(5000, EV_REL, REL_X, 1), syn_at(5000),
                                       event_at(4000, EV_REL, REL_X, 1), syn_at(4000),
                                       event_at(5000, EV_REL, REL_X, 40'000), syn_at(5000),
                                       event_at(6000, EV_SYN, SYN_DROPPED, 0), syn_at(6000),
                                       event_at(7000, EV_REL, REL_X, 1), syn_at(7000)})));
    REQUIRE(drained);
    CHECK(drained->reports.size() == 3);
    CHECK(tests::any_contains(drained->remarks, "lost events while recording (SYN_DROPPED): 1"));
    CHECK(
        tests::any_contains(drained->remarks, "ran backwards or were no time, taken as losses: 1"));
    CHECK(
        tests::any_contains(drained->remarks, "more than 32767 counts, their motion left out: 1"));
}

TEST_CASE("a broken evemu line costs its packet, and is told with its number") {
    const tests::TempFolder folder;
    const std::string event_lines = "E: 0.000001 0002 0000 0003\n"
                                    "E: 0.000001 0000 0000 0000\n"
                                    "E: 0.008001 0002 0000 99999999999\n"
                                    "E: 0.008001 0000 0000 0000\n"
                                    "E: 0.016001 0002 zzzz 0005\n"
                                    "E: 0.016001 0000 0000 0000\n"
                                    "E: 0.024001 0002 0000 0007\n"
                                    "E: 0.024001 0000 0000 0000\n" +
                                    std::string(100'000, 'E') +
                                    "\n"
                                    "E: 0.032001 0002 0000 0009\n"
                                    "E: 0.032001 0000 0000 0000\n"
                                    "E: 0.040001 0002 0000 -011\n"
                                    "E: 0.040001 0000 0000 0000\n";
    const auto drained = tests::drain(folder.file("broken.evemu", k_evemu_head + event_lines));
    REQUIRE(drained);
    CHECK(tests::as_text(drained->reports) ==
          Lines{"1 us pointer 0 moved 3 0 wheel 0 pressed 0 released 0",
                "24001 us pointer 0 moved 7 0 wheel 0 pressed 0 released 0 lost",
                "40001 us pointer 0 moved -11 0 wheel 0 pressed 0 released 0 lost"});
    CHECK(tests::any_contains(drained->remarks,
                              "lines that are no event, skipped: 3, the first at line 6"));
}

TEST_CASE("evemu text without any readable event is refused") {
    const tests::TempFolder folder;
    const auto drained =
        tests::drain(folder.file("bad.evemu", k_evemu_head + "E: now 0002 0000 0001\nE: \n"));
    REQUIRE_FALSE(drained);
    CHECK(drained.error().code == ErrorCode::bad_format);
    CHECK(drained.error().message.find("no readable event") != std::string::npos);
}

TEST_CASE("evemu text of a keyboard is refused and not decoded") {
    const tests::TempFolder folder;
    const auto file =
        folder.file("keyboard.evemu", "# EVEMU 1.3\nN: Example Keyboard\nI: 0003 1234 5678 0111\n"
                                      "B: 01 fe ff ff ff ff ff ff ff\n"
                                      "E: 0.000001 0001 001e 0001\nE: 0.000001 0000 0000 0000\n");
    CHECK(refused(file, "'Example Keyboard', which is no pointer") == ErrorCode::bad_format);
}

TEST_CASE("evemu text of a touchpad tells its kind and resolution") {
    const tests::TempFolder folder;
    std::string text = "# EVEMU 1.3\nN: Example Touchpad\nI: 0018 1234 5678 0100\n"
                       "P: 05 00 00 00 00 00 00 00\n";
    for (int word = 0; word < 6; ++word) // BTN_LEFT in word 4, BTN_TOOL_FINGER, BTN_TOUCH in 5
        text += word == 4   ? "B: 01 00 00 01 00 00 00 00 00\n"
                : word == 5 ? "B: 01 20 04 00 00 00 00 00 00\n"
                            : "B: 01 00 00 00 00 00 00 00 00\n";
    text += "B: 03 03 00 00 00 00 00 00 00\nA: 00 0 4000 0 0 31\nA: 01 0 2000 0 0 32\n"
            "E: 0.000001 0001 014a 0001\nE: 0.000001 0001 0145 0001\n"
            "E: 0.000001 0003 0000 0100\nE: 0.000001 0000 0000 0000\n"
            "E: 0.010001 0003 0000 0104\r\nE: 0.010001 0000 0000 0000\r\n";
    const auto drained = tests::drain(folder.file("pad.evemu", text));
    REQUIRE(drained);
    CHECK(drained->pointers[0].kind == estimator::PointerKind::touchpad);
    REQUIRE(drained->pointers[0].resolution);
    CHECK(drained->pointers[0].resolution->x_per_mm == 31.0);
    CHECK(drained->pointers[0].resolution->y_per_mm == 32.0);
    CHECK(tests::as_text(drained->reports) ==
          Lines{"10001 us pointer 0 moved 4 0 wheel 0 pressed 0 released 0"});
}
