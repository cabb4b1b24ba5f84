#include "report/devices.hpp"

#include "config/calibration_for.hpp"
#include "report/table.hpp"

#include <algorithm>
#include <fmt/format.h>
#include <nlohmann/json.hpp>

namespace sagitta::report {
namespace {

using Json = nlohmann::ordered_json;
using estimator::CpiSource;

std::string kind_text(estimator::PointerKind kind) {
    std::string text = estimator::to_text(kind);
    std::replace(text.begin(), text.end(), '_', ' ');
    return text;
}

const char* source_text(CpiSource source) {
    switch (source) {
    case CpiSource::assumed:
        return "assumed";
    case CpiSource::udev:
        return "from udev";
    case CpiSource::config:
        return "from the config";
    case CpiSource::command_line:
        return "from the command line";
    case CpiSource::axis_resolution:
        return "from the device";
    }
    return "";
}

std::string reading_text(const DeviceHere& device) {
    if (device.ignored) {
        return "ignored by the config";
    }
    return device.node.readable ? "yes" : "no, see sagitta check";
}

std::string here_table(const DeviceList& list) {
    Table table{{{"pointer", Align::left},
                 {"kind", Align::left},
                 {"CPI", Align::right},
                 {"", Align::left},
                 {"readable", Align::left},
                 {"node", Align::left}}};
    for (const DeviceHere& device : list.here) {
        table.add({shortened(printable(device.node.description.name), 32),
                   kind_text(device.node.description.kind),
                   fmt::format("{:.0f}", device.cpi.value()), source_text(device.cpi_source),
                   reading_text(device), device.node.node.string()});
    }
    return table.text();
}

std::string stored_table(const DeviceList& list, const Session& session) {
    Table table{{{"pointer", Align::left},
                 {"kind", Align::left},
                 {"CPI", Align::right},
                 {"", Align::left},
                 {"since", Align::left}}};
    for (const store::StoredPointer& pointer : list.stored) {
        table.add({shortened(pointer_title(pointer), 44), kind_text(pointer.kind),
                   fmt::format("{:.0f}", pointer.cpi.value()), source_text(pointer.cpi_source),
                   to_text(session.calendar.day_of(pointer.first_seen))});
    }
    return table.text();
}

} // namespace

std::vector<DeviceHere> describe_devices(std::vector<input::PointerNode> nodes,
                                         const config::Settings& settings) {
    std::vector<DeviceHere> devices;
    for (input::PointerNode& node : nodes) {
        const config::PointerSettings* mine = config::settings_for(settings, node.description.name);
        const auto calibration = config::calibration_for(settings, node.description);
        devices.push_back({std::move(node), calibration.cpi, calibration.cpi_source,
                           mine != nullptr && mine->ignore});
    }
    return devices;
}

std::string devices_text(const DeviceList& list, const Session& session) {
    std::string text = session.style.heading("Pointers of this machine") + "\n";
    text += list.here.empty() ? "  none; 'sagitta check' tells why\n" : here_table(list);
    text +=
        "\n" + session.style.heading("Pointers in the store " + session.store_file.string()) + "\n";
    if (!list.store_found) {
        text += "  there is no store yet; recording makes it\n";
    } else {
        text += list.stored.empty() ? "  none yet\n" : stored_table(list, session);
    }
    const bool assumed =
        std::any_of(list.here.begin(), list.here.end(), [](const DeviceHere& device) {
            return device.cpi_source == CpiSource::assumed;
        });
    if (assumed) {
        text +=
            "\n" +
            wrapped(
                "An assumed CPI makes hand travel and hand speed in mm a guess; set the pointer's "
                "own as cpi in the config. With a flat gain, measures in px do not depend on it.");
    }
    return text;
}

std::string devices_json(const DeviceList& list) {
    Json json = {{"here", Json::array()}, {"stored", Json::array()}};
    for (const DeviceHere& device : list.here) {
        json["here"].push_back({{"name", device.node.description.name},
                                {"kind", estimator::to_text(device.node.description.kind)},
                                {"node", device.node.node.string()},
                                {"readable", device.node.readable},
                                {"ignored", device.ignored},
                                {"cpi", device.cpi.value()},
                                {"cpi_source", estimator::to_text(device.cpi_source)}});
    }
    for (const store::StoredPointer& pointer : list.stored) {
        json["stored"].push_back({{"name", pointer.name},
                                  {"kind", estimator::to_text(pointer.kind)},
                                  {"origin", estimator::to_text(pointer.origin)},
                                  {"cpi", pointer.cpi.value()},
                                  {"cpi_source", estimator::to_text(pointer.cpi_source)},
                                  {"first_seen_utc", to_iso(pointer.first_seen)}});
    }
    return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

Result<Output> run_devices(const Session& session) {
    auto nodes = input::list_pointers();
    if (!nodes) {
        return tl::unexpected{nodes.error()};
    }
    DeviceList list;
    list.here = describe_devices(std::move(*nodes), session.settings);
    const auto store = open_for_reading(session);
    list.store_found = store.has_value();
    if (store) {
        auto stored = store->pointers();
        if (!stored) {
            return tl::unexpected{stored.error()};
        }
        list.stored = std::move(*stored);
    } else if (session.store_named || store.error().code != estimator::ErrorCode::not_found) {
        return tl::unexpected{store.error()};
    }
    return Output{session.json ? devices_json(list) : devices_text(list, session)};
}

} // namespace sagitta::report
