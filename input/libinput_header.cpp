#include "input/libinput_header.hpp"

#include <yaml-cpp/yaml.h>

namespace sagitta::input {

namespace {

template <std::size_t Bits>
void set_codes(std::bitset<Bits>& bits, const YAML::Node& codes) {
    for (const YAML::Node& code : codes)
        if (const auto number = code.as<unsigned>(); number < Bits)
            bits.set(number);
}

void read_capabilities(Capabilities& can, const YAML::Node& evdev) {
    for (const auto& entry : evdev["codes"]) {
        switch (entry.first.as<unsigned>()) {
        case EV_KEY:
            set_codes(can.keys, entry.second);
            break;
        case EV_REL:
            set_codes(can.relative, entry.second);
            break;
        case EV_ABS:
            set_codes(can.absolute, entry.second);
            break;
        default:
            break;
        }
    }
    set_codes(can.properties, evdev["properties"]);
}

std::optional<estimator::AxisResolution> read_resolution(const YAML::Node& evdev) {
    // absinfo: code: [minimum, maximum, fuzz, flat, resolution]
    constexpr std::size_t k_place = 4;
    double x_per_mm = 0.0;
    double y_per_mm = 0.0;
    for (const auto& entry : evdev["absinfo"]) {
        if (!entry.second.IsSequence() || entry.second.size() <= k_place)
            continue;
        const auto code = entry.first.as<unsigned>();
        if (code == ABS_X)
            x_per_mm = entry.second[k_place].as<int>();
        if (code == ABS_Y)
            y_per_mm = entry.second[k_place].as<int>();
    }
    if (x_per_mm <= 0.0 || y_per_mm <= 0.0)
        return std::nullopt;
    return estimator::AxisResolution{x_per_mm, y_per_mm};
}

UdevProperties read_properties(const YAML::Node& device) {
    UdevProperties properties;
    const YAML::Node udev = device["udev"];
    if (!udev.IsDefined() || !udev.IsMap())
        return properties;
    for (const YAML::Node& line : udev["properties"]) {
        const std::string text = line.as<std::string>();
        if (const std::size_t equals = text.find('='); equals != std::string::npos)
            properties[text.substr(0, equals)] = text.substr(equals + 1);
    }
    return properties;
}

} // namespace

estimator::Result<DeviceFacts> read_libinput_header(const std::string& yaml) {
    try {
        const YAML::Node devices = YAML::Load(yaml);
        const YAML::Node device = devices[0];
        const YAML::Node evdev = device["evdev"];
        DeviceFacts facts;
        facts.name = evdev["name"].as<std::string>();
        if (const YAML::Node ids = evdev["id"]; ids.IsSequence() && ids.size() >= 3) {
            facts.bus = ids[0].as<std::uint16_t>();
            facts.vendor = ids[1].as<std::uint16_t>();
            facts.product = ids[2].as<std::uint16_t>();
        }
        read_capabilities(facts.can, evdev);
        facts.resolution = read_resolution(evdev);
        facts.properties = read_properties(device);
        return facts;
    } catch (const std::exception& failure) {
        return estimator::fail(estimator::ErrorCode::bad_format,
                               std::string{"the device's description is not readable: "} +
                                   failure.what());
    }
}

} // namespace sagitta::input
