#include "fixtures.hpp"
#include "input/pointer_nodes.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using estimator::PointerKind;

namespace {

/// A copy of what sysfs shows of input devices.
class FakeMachine {
public:
    void add(int number, const std::string& name, const std::string& key, const std::string& rel,
             const std::string& abs, const std::string& properties = "0") const {
        const std::string event = "event" + std::to_string(number);
        const std::string folder = "sys/class/input/" + event + "/device/";
        (void)m_folder.file(folder + "name", name + "\n");
        (void)m_folder.file(folder + "id/bustype", "0003\n");
        (void)m_folder.file(folder + "id/vendor", "1d57\n");
        (void)m_folder.file(folder + "id/product", "fa60\n");
        (void)m_folder.file(folder + "capabilities/key", key + "\n");
        (void)m_folder.file(folder + "capabilities/rel", rel + "\n");
        (void)m_folder.file(folder + "capabilities/abs", abs + "\n");
        (void)m_folder.file(folder + "properties", properties + "\n");
        (void)m_folder.file("dev/input/" + event, "");
    }
    [[nodiscard]] input::SortedNodes list() const {
        auto nodes = input::nodes_by_sysfs(m_folder.path());
        REQUIRE(nodes);
        return input::sort_nodes(std::move(*nodes));
    }
    [[nodiscard]] const tests::TempFolder& folder() const { return m_folder; }

private:
    tests::TempFolder m_folder;
};

// Bitmaps as a 64-bit kernel prints them: words of 64 bits, the highest first. BTN_LEFT is 0x110,
// bit 16 of the fifth word.
const std::string k_mouse_keys = "1f0000 0 0 0 0";
const std::string k_mouse_steps = "1943"; // X, Y, HWHEEL, WHEEL, both fine wheels
const std::string k_keyboard_keys =
    "1000000000007 ff9f207ac14057ff febeffdfffefffff fffffffffffffffe";

} // namespace

TEST_CASE("pointers are found by capability where no udev runs, in the order of their nodes") {
    const FakeMachine machine;
    machine.add(10, "Example Mouse", k_mouse_keys, k_mouse_steps, "0");
    machine.add(2, "Example Touchpad", "e520 10000 0 0 0 0", "0", "660800011000003", "5");
    machine.add(3, "Power Button", "10000000000000 0", "0", "0");
    const auto nodes = machine.list();
    REQUIRE(nodes.pointers.size() == 2);
    CHECK(nodes.pointers[0].description.name == "Example Touchpad");
    CHECK(nodes.pointers[0].description.kind == PointerKind::touchpad);
    CHECK(nodes.pointers[1].description.name == "Example Mouse");
    CHECK(nodes.pointers[1].description.kind == PointerKind::mouse);
    CHECK(nodes.pointers[1].description.origin == estimator::Origin::live);
    CHECK(nodes.pointers[1].description.vendor == 0x1d57);
    CHECK(nodes.pointers[1].node == machine.folder().path() / "dev/input/event10");
    CHECK(nodes.pointers[1].readable);
    CHECK(nodes.keyboard_pointers.empty());
}

TEST_CASE("keyboards are no pointers, and a pointer that is a keyboard too is set apart") {
    const FakeMachine machine;
    machine.add(0, "Example Keyboard", k_keyboard_keys, "0", "0");
    machine.add(1, "Example Receiver",
                "1f0000 1000000000007 ff9f207ac14057ff febeffdfffefffff "
                "fffffffffffffffe",
                k_mouse_steps, "0");
    const auto nodes = machine.list();
    CHECK(nodes.pointers.empty());
    REQUIRE(nodes.keyboard_pointers.size() == 1);
    CHECK(nodes.keyboard_pointers[0].description.name == "Example Receiver");
}

TEST_CASE("a machine without input devices has no pointers") {
    const tests::TempFolder empty;
    const auto nodes = input::nodes_by_sysfs(empty.path());
    REQUIRE(nodes);
    CHECK(nodes->empty());
}

TEST_CASE("broken and missing files of sysfs make no pointer and no crash") {
    const FakeMachine machine;
    machine.add(0, "Odd", "zz 0", "-1", "0x3");
    machine.add(1, "Endless", std::string(20000, 'f'), std::string(5000, ' '), "");
    (void)machine.folder().file("sys/class/input/event7/other", "");
    (void)machine.folder().file("sys/class/input/mouse0/device/name", "Not an event node\n");
    const auto nodes = machine.list();
    CHECK(nodes.pointers.empty());
}

TEST_CASE("listing this machine's pointers works, with or without any") {
    CHECK(input::list_pointers().has_value());
    CHECK(input::list_keyboard_pointers().has_value());
}
