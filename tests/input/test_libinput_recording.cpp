#include "fixtures.hpp"

#include <doctest/doctest.h>
#include <unistd.h>

using namespace sagitta;
using estimator::ErrorCode;
using estimator::PointerKind;
using Lines = std::vector<std::string>;

namespace {

const std::string k_head = "version: 1\nndevices: 1\ndevices:\n";

std::string device(const std::string& name, const std::string& mark, const std::string& events,
                   const std::string& indent = "  ") {
    return "-" + indent.substr(1) + "node: /dev/input/event4\n" + indent + "evdev:\n" + indent +
           indent + "name: \"" + name + "\"\n" + indent + indent + "id: [3, 1, 2, 3]\n" + indent +
           indent + "codes:\n" + indent + indent + indent + "1: [272]\n" + indent + indent +
           indent + "2: [0, 1]\n" + indent + "udev:\n" + indent + indent + "properties:\n" +
           indent + indent + "- ID_INPUT=1\n" + indent + indent + "- " + mark + "=1\n" + indent +
           "events:\n" + events;
}

std::string step(int milliseconds, int dx, const std::string& indent = "  ") {
    const std::string stamp = "[ 0, " + std::to_string(milliseconds * 1000) + ", ";
    return indent + "- evdev:\n" + indent + "  - " + stamp + "2, 0, " + std::to_string(dx) +
           "] # REL_X\n" + indent + "  - " + stamp + "0, 0, 0] # SYN_REPORT\n";
}

} // namespace

TEST_CASE("several devices of a libinput-record are merged in the order of time") {
    const tests::TempFolder folder;
    const auto drained = tests::drain(
        folder.file("two.yml", k_head + device("Mouse", "ID_INPUT_MOUSE", step(1, 1) + step(5, 5)) +
                                   device("Ball", "ID_INPUT_TRACKBALL",
                                          step(2, 2) + step(5, 50) + step(9, 9))));
    REQUIRE(drained);
    REQUIRE(drained->pointers.size() == 2);
    CHECK(drained->pointers[0].kind == PointerKind::mouse);
    CHECK(drained->pointers[1].kind == PointerKind::trackball);
    CHECK(tests::as_text(drained->reports) ==
          Lines{"1000 us pointer 0 moved 1 0 wheel 0 pressed 0 released 0",
                "2000 us pointer 1 moved 2 0 wheel 0 pressed 0 released 0",
                "5000 us pointer 0 moved 5 0 wheel 0 pressed 0 released 0",
                "5000 us pointer 1 moved 50 0 wheel 0 pressed 0 released 0",
                "9000 us pointer 1 moved 9 0 wheel 0 pressed 0 released 0"});
    CHECK(drained->remarks.empty());
}

TEST_CASE("a keyboard in a libinput-record is skipped and its events are not read") {
    const tests::TempFolder folder;
    const auto drained = tests::drain(folder.file(
        "desk.yml", k_head +
                        device("Keyboard", "ID_INPUT_KEYBOARD",
                               "  - evdev:\n    - [ 0, 1000, 1, 30, 1] # this line is no event: ]\n"
                               "    - secret\n") +
                        device("Mouse", "ID_INPUT_MOUSE", step(2, 2))));
    REQUIRE(drained);
    REQUIRE(drained->pointers.size() == 1);
    CHECK(drained->pointers[0].name == "Mouse");
    CHECK(drained->reports.size() == 1);
    REQUIRE(drained->remarks.size() == 1);
    CHECK(tests::any_contains(drained->remarks,
                              "devices that are no pointer, skipped: 1, the first at line 4"));
}

TEST_CASE("other indentation, other layers and comments between events do not disturb") {
    const tests::TempFolder folder;
    const auto drained = tests::drain(folder.file(
        "wide.yml", k_head + device("Mouse", "ID_INPUT_MOUSE",
                                    "      # Current time is 12:34:56\n" + step(1, 1, "      ") +
                                        "      - hid:\n          time: [ 0, 1 ]\n"
                                        "          hidraw0: [ 0x01, 0x02,\n"
                                        "                     0x03 ]\n"
                                        "      - libinput:\n"
                                        "        - {time: 0.1, type: POINTER_MOTION}\n" +
                                        step(2, 2, "      "),
                                    "    ")));
    REQUIRE(drained);
    CHECK(drained->reports.size() == 2);
    CHECK(drained->remarks.empty());
}

TEST_CASE("a broken line of a libinput-record costs its packet, and is told with its number") {
    const tests::TempFolder folder;
    const auto drained = tests::drain(
        folder.file("broken.yml", k_head + device("Mouse", "ID_INPUT_MOUSE",
                                                  step(1, 1) +
                                                      "  - evdev:\n"
                                                      "    - [ 0, 2000, 2, 0, 99999999999]\n"
                                                      "    - [ 0, 2000, 0, 0, 0]\n"
                                                      "  - evdev:\n"
                                                      "    - [ 0, 3000, 2, 0]\n"
                                                      "    - [ 0, 3000, 0, 0, 0]\n" +
                                                      step(4, 4) + step(5, 5))));
    REQUIRE(drained);
    CHECK(tests::as_text(drained->reports) ==
          Lines{"1000 us pointer 0 moved 1 0 wheel 0 pressed 0 released 0",
                "4000 us pointer 0 moved 4 0 wheel 0 pressed 0 released 0 lost",
                "5000 us pointer 0 moved 5 0 wheel 0 pressed 0 released 0"});
    CHECK(tests::any_contains(drained->remarks,
                              "lines that are no event, skipped: 2, the first at line 20"));
}

TEST_CASE("a libinput-record without a pointer is refused") {
    const tests::TempFolder folder;
    for (const std::string& content :
         {k_head, k_head + device("Keyboard", "ID_INPUT_KEYBOARD", step(1, 1)),
          k_head + device("Mouse", "ID_INPUT_MOUSE", "").substr(0, 90)}) {
        const auto drained = tests::drain(folder.file("none.yml", content));
        REQUIRE_FALSE(drained);
        CHECK(drained.error().code == ErrorCode::bad_format);
        CHECK(drained.error().message.find("holds no pointer") != std::string::npos);
    }
}

TEST_CASE("a device whose description is broken or nested too deep is left out") {
    const tests::TempFolder folder;
    const std::string deep = "- node: x\n  evdev: " + std::string(3000, '[') + "\n  events:\n";
    const std::string wrong = "- node: x\n  evdev:\n    name: [\n  events:\n" + step(1, 1);
    const std::string scalar = "- node: x\n  evdev: text\n  events:\n" + step(1, 1);
    const auto drained =
        tests::drain(folder.file("deep.yml", k_head + deep + wrong + scalar +
                                                 device("Mouse", "ID_INPUT_MOUSE", step(2, 2))));
    REQUIRE(drained);
    CHECK(drained->pointers.size() == 1);
    CHECK(drained->reports.size() == 1);
    CHECK(tests::any_contains(drained->remarks, "devices whose description is broken, skipped: 3"));
}

TEST_CASE("text of a libinput-record beyond 64 MiB is refused without reading it") {
    const tests::TempFolder folder;
    const auto file = folder.file("large.yml", k_head);
    REQUIRE(::truncate(file.c_str(), off_t{65} * 1024 * 1024) == 0);
    const auto opened = input::open_recording(file);
    REQUIRE_FALSE(opened);
    CHECK(opened.error().message.find("larger than 64 MiB") != std::string::npos);
}
