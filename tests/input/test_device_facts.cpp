#include "input/device_facts.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using estimator::PointerKind;
using input::parse_mouse_dpi;

namespace {

double dpi(std::string_view text) {
    const auto cpi = parse_mouse_dpi(text);
    return cpi ? cpi->value() : 0.0;
}

std::optional<PointerKind> kind(const input::DeviceFacts& facts) {
    const auto pointer = input::describe(facts, estimator::Origin::live);
    if (!pointer)
        return std::nullopt;
    return pointer->kind;
}

input::DeviceFacts relative_device() {
    input::DeviceFacts facts;
    facts.can.relative.set(REL_X).set(REL_Y);
    facts.can.keys.set(BTN_LEFT);
    return facts;
}

input::DeviceFacts absolute_device() {
    input::DeviceFacts facts;
    facts.can.absolute.set(ABS_X).set(ABS_Y);
    return facts;
}

input::DeviceFacts marked(input::DeviceFacts facts, const std::string& mark) {
    facts.properties["ID_INPUT"] = "1";
    facts.properties[mark] = "1";
    return facts;
}

} // namespace

// Source of the grammar: udev 252, hwdb.d/70-mouse.hwdb, its head comment.
TEST_CASE("MOUSE_DPI is a value, or a list with one default, each with or without a rate") {
    CHECK(dpi("800") == 800.0);
    CHECK(dpi("1000@125") == 1000.0);
    CHECK(dpi("400 *800 2000") == 800.0);
    CHECK(dpi("*1000") == 1000.0);
    CHECK(dpi("400@125 *800@125 3200@1000") == 800.0);
    CHECK(dpi("  400   *1600@500\t") == 1600.0);
}

TEST_CASE("MOUSE_DPI that breaks its grammar tells nothing") {
    for (const char* text : {"", " ", "400 800", "*", "fast", "800@", "@125", "-800", "0", "8e2",
                             "*400 *800", "800dpi", "99999999999999999999"})
        CHECK(dpi(text) == 0.0);
}

TEST_CASE("udev's marks decide on the kind") {
    CHECK(kind(marked(relative_device(), "ID_INPUT_MOUSE")) == PointerKind::mouse);
    auto trackball = marked(relative_device(), "ID_INPUT_MOUSE");
    CHECK(kind(marked(trackball, "ID_INPUT_TRACKBALL")) == PointerKind::trackball);
    auto stick = marked(relative_device(), "ID_INPUT_MOUSE");
    CHECK(kind(marked(stick, "ID_INPUT_POINTINGSTICK")) == PointerKind::pointing_stick);
    CHECK(kind(marked(absolute_device(), "ID_INPUT_TOUCHPAD")) == PointerKind::touchpad);
    CHECK(kind(marked(absolute_device(), "ID_INPUT_TABLET")) == PointerKind::absolute);
    CHECK(kind(marked(absolute_device(), "ID_INPUT_TOUCHSCREEN")) == PointerKind::absolute);
    CHECK(kind(marked(absolute_device(), "ID_INPUT_MOUSE")) == PointerKind::absolute);
    CHECK_FALSE(kind(marked(relative_device(), "ID_INPUT_KEY")));
    auto pad = marked(absolute_device(), "ID_INPUT_TABLET");
    CHECK_FALSE(kind(marked(pad, "ID_INPUT_TABLET_PAD")));
}

TEST_CASE("where udev is silent the capabilities decide on the kind") {
    CHECK(kind(relative_device()) == PointerKind::mouse);
    auto stick = relative_device();
    stick.can.properties.set(INPUT_PROP_POINTING_STICK);
    CHECK(kind(stick) == PointerKind::pointing_stick);
    auto touchpad = absolute_device();
    touchpad.can.keys.set(BTN_TOOL_FINGER).set(BTN_TOUCH).set(BTN_LEFT);
    CHECK(kind(touchpad) == PointerKind::touchpad);
    auto pen = absolute_device();
    pen.can.keys.set(BTN_TOOL_PEN).set(BTN_TOUCH);
    CHECK(kind(pen) == PointerKind::absolute);
    auto virtual_mouse = absolute_device();
    virtual_mouse.can.keys.set(BTN_LEFT);
    CHECK(kind(virtual_mouse) == PointerKind::absolute);
    auto joystick = absolute_device();
    joystick.can.keys.set(BTN_TRIGGER);
    CHECK_FALSE(kind(joystick));
    auto accelerometer = absolute_device();
    accelerometer.can.properties.set(INPUT_PROP_ACCELEROMETER);
    CHECK_FALSE(kind(accelerometer));
    CHECK_FALSE(kind(input::DeviceFacts{}));
}

TEST_CASE("a device with all keys of a keyboard is one, whatever else it can do") {
    auto both = relative_device();
    CHECK_FALSE(input::is_keyboard(both));
    both.can.keys.set(KEY_VOLUMEUP).set(KEY_A);
    CHECK_FALSE(input::is_keyboard(both));
    for (std::size_t key = KEY_ESC; key < 32; ++key)
        both.can.keys.set(key);
    CHECK(input::is_keyboard(both));
    CHECK(input::is_keyboard(marked(relative_device(), "ID_INPUT_KEYBOARD")));
}

TEST_CASE("a description carries ids, MOUSE_DPI and the resolution of absolute axes only") {
    auto facts = marked(relative_device(), "ID_INPUT_MOUSE");
    facts.name = "Example Mouse";
    facts.bus = 3;
    facts.vendor = 0x1234;
    facts.product = 0x5678;
    facts.properties["MOUSE_DPI"] = "1000@125";
    facts.resolution = estimator::AxisResolution{10.0, 12.0};
    const auto mouse = input::describe(facts, estimator::Origin::recording);
    REQUIRE(mouse);
    CHECK(mouse->name == "Example Mouse");
    CHECK(mouse->origin == estimator::Origin::recording);
    CHECK(mouse->bus == 3);
    CHECK(mouse->vendor == 0x1234);
    CHECK(mouse->product == 0x5678);
    REQUIRE(mouse->udev_cpi);
    CHECK(mouse->udev_cpi->value() == 1000.0);
    CHECK_FALSE(mouse->resolution);
    facts.can = absolute_device().can;
    const auto absolute = input::describe(facts, estimator::Origin::recording);
    REQUIRE(absolute);
    REQUIRE(absolute->resolution);
    CHECK(absolute->resolution->y_per_mm == 12.0);
}

TEST_CASE("names become valid text of bounded length") {
    CHECK(input::clean_name("Example Mouse") == "Example Mouse");
    CHECK(input::clean_name("  padded ") == "padded");
    CHECK(input::clean_name("Mäuschen €") == "Mäuschen €");
    CHECK(input::clean_name("a\nb\x1b[31m\x7f") == "a?b?[31m?");
    CHECK(input::clean_name("\xff\xc0\x80") == "???");
    CHECK(input::clean_name("\xed\xa0\x80") == "???");      // half of a surrogate pair
    CHECK(input::clean_name("\xf4\x90\x80\x80") == "????"); // beyond Unicode
    CHECK(input::clean_name("cut \xe2\x82") == "cut ??");
    CHECK(input::clean_name("") == "unnamed pointer");
    CHECK(input::clean_name("   ") == "unnamed pointer");
    CHECK(input::clean_name(std::string(5000, 'x')).size() == 128);
}
