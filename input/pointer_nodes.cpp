#include "input/pointer_nodes.hpp"

#include "input/file.hpp"
#include "input/text_fields.hpp"

#include <algorithm>
#include <cerrno>
#include <fcntl.h>
#include <fstream>
#include <libudev.h>
#include <memory>
#include <system_error>
#include <unistd.h>

namespace sagitta::input {

using estimator::ErrorCode;
using estimator::Result;

namespace {

constexpr std::string_view k_node_prefix = "event";

/// First line of a small file; empty when it cannot be read.
std::string first_line(const std::filesystem::path& file) {
    std::ifstream stream{file};
    std::string line;
    std::getline(stream, line);
    return line;
}

std::uint16_t read_id(const std::filesystem::path& file) {
    const auto id = parse_integer(trimmed(first_line(file)), 16);
    return id && *id >= 0 && *id <= 0xffff ? static_cast<std::uint16_t>(*id) : std::uint16_t{0};
}

/// A bitmap of sysfs: hexadecimal words of the kernel's long, the most significant first.
template <std::size_t Bits>
void read_bitmap(std::bitset<Bits>& bits, const std::filesystem::path& file) {
    constexpr std::size_t k_word_bits = 8 * sizeof(unsigned long);
    std::string text = first_line(file);
    for (std::size_t first = 0; !text.empty() && first < Bits; first += k_word_bits) {
        text.resize(trimmed(text).empty() ? 0 : text.find_last_not_of(" \t\r") + 1);
        const std::size_t blank = text.find_last_of(" \t");
        const std::size_t start = blank == std::string::npos ? 0 : blank + 1;
        std::uint64_t word = 0;
        for (const char digit : std::string_view{text}.substr(start)) {
            const auto nibble = parse_integer(std::string_view{&digit, 1}, 16);
            if (!nibble)
                return;
            word = word << 4 | static_cast<std::uint64_t>(*nibble);
        }
        for (std::size_t bit = 0; bit < k_word_bits && first + bit < Bits; ++bit)
            if ((word >> bit & 1) != 0)
                bits.set(first + bit);
        text.resize(start);
    }
}

bool is_event_node(std::string_view name) {
    return name.starts_with(k_node_prefix) && parse_integer(name.substr(k_node_prefix.size()));
}

std::int64_t number_of(const std::filesystem::path& node) {
    const std::string name = node.filename().string();
    return parse_integer(std::string_view{name}.substr(k_node_prefix.size())).value_or(0);
}

struct Unref {
    void operator()(udev* context) const { udev_unref(context); }
    void operator()(udev_enumerate* list) const { udev_enumerate_unref(list); }
    void operator()(udev_device* device) const { udev_device_unref(device); }
};

UdevProperties properties_of(udev_device* device) {
    UdevProperties properties;
    udev_list_entry* entry = nullptr;
    udev_list_entry_foreach(entry, udev_device_get_properties_list_entry(device)) {
        const char* name = udev_list_entry_get_name(entry);
        const char* value = udev_list_entry_get_value(entry);
        if (name != nullptr && value != nullptr)
            properties[name] = value;
    }
    return properties;
}

Result<SortedNodes> list_nodes() {
    std::error_code failure;
    const bool udev_runs = std::filesystem::is_directory("/run/udev/data", failure);
    auto nodes = udev_runs ? nodes_by_udev() : nodes_by_sysfs("/");
    if (!nodes)
        return tl::unexpected{nodes.error()};
    return sort_nodes(std::move(*nodes));
}

} // namespace

DeviceFacts read_sysfs_facts(const std::filesystem::path& device_folder) {
    DeviceFacts facts;
    facts.name = first_line(device_folder / "name");
    facts.bus = read_id(device_folder / "id" / "bustype");
    facts.vendor = read_id(device_folder / "id" / "vendor");
    facts.product = read_id(device_folder / "id" / "product");
    read_bitmap(facts.can.keys, device_folder / "capabilities" / "key");
    read_bitmap(facts.can.relative, device_folder / "capabilities" / "rel");
    read_bitmap(facts.can.absolute, device_folder / "capabilities" / "abs");
    read_bitmap(facts.can.properties, device_folder / "properties");
    return facts;
}

Result<std::vector<NodeFacts>> nodes_by_sysfs(const std::filesystem::path& root) {
    std::vector<NodeFacts> nodes;
    const std::filesystem::path folder = root / "sys" / "class" / "input";
    std::error_code failure;
    std::filesystem::directory_iterator entries{folder, failure};
    if (failure == std::errc::no_such_file_or_directory)
        return nodes; // a kernel without any input device
    for (; !failure && entries != std::filesystem::directory_iterator{};
         entries.increment(failure)) {
        const std::string name = entries->path().filename().string();
        if (is_event_node(name))
            nodes.push_back(
                {root / "dev" / "input" / name, read_sysfs_facts(entries->path() / "device")});
    }
    if (failure)
        return estimator::fail(ErrorCode::io, "cannot list the input devices in " + shown(folder) +
                                                  ": " + failure.message() + "; is /sys mounted?");
    return nodes;
}

Result<std::vector<NodeFacts>> nodes_by_udev() {
    const std::unique_ptr<udev, Unref> context{udev_new()};
    const std::unique_ptr<udev_enumerate, Unref> list{context ? udev_enumerate_new(context.get())
                                                              : nullptr};
    if (!list || udev_enumerate_add_match_subsystem(list.get(), "input") < 0 ||
        udev_enumerate_add_match_sysname(list.get(), "event*") < 0 ||
        udev_enumerate_scan_devices(list.get()) < 0)
        return estimator::fail(ErrorCode::io, "cannot list the input devices through udev; is "
                                              "systemd-udevd running?");
    std::vector<NodeFacts> nodes;
    udev_list_entry* entry = nullptr;
    udev_list_entry_foreach(entry, udev_enumerate_get_list_entry(list.get())) {
        const char* syspath = udev_list_entry_get_name(entry);
        const std::unique_ptr<udev_device, Unref> device{
            udev_device_new_from_syspath(context.get(), syspath)};
        const char* node = device ? udev_device_get_devnode(device.get()) : nullptr;
        if (node == nullptr)
            continue; // gone meanwhile
        DeviceFacts facts = read_sysfs_facts(std::filesystem::path{syspath} / "device");
        facts.properties = properties_of(device.get());
        nodes.push_back({node, std::move(facts)});
    }
    return nodes;
}

SortedNodes sort_nodes(std::vector<NodeFacts> nodes) {
    std::sort(nodes.begin(), nodes.end(), [](const NodeFacts& a, const NodeFacts& b) {
        return number_of(a.node) < number_of(b.node);
    });
    SortedNodes sorted;
    for (const NodeFacts& entry : nodes) {
        auto pointer = describe(entry.facts, estimator::Origin::live);
        if (!pointer)
            continue;
        const bool readable = ::faccessat(AT_FDCWD, entry.node.c_str(), R_OK, AT_EACCESS) == 0;
        auto& list = is_keyboard(entry.facts) ? sorted.keyboard_pointers : sorted.pointers;
        list.push_back({entry.node, std::move(*pointer), readable});
    }
    return sorted;
}

Result<std::vector<PointerNode>> list_pointers() {
    auto nodes = list_nodes();
    if (!nodes)
        return tl::unexpected{nodes.error()};
    return std::move(nodes->pointers);
}

Result<std::vector<PointerNode>> list_keyboard_pointers() {
    auto nodes = list_nodes();
    if (!nodes)
        return tl::unexpected{nodes.error()};
    return std::move(nodes->keyboard_pointers);
}

} // namespace sagitta::input
