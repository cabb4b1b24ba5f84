#include "config/settings_keys.hpp"

#include "config/gain_settings.hpp"

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <string>
#include <string_view>
#include <utility>

namespace sagitta::config {
namespace {

using estimator::Cpi;
using estimator::Micros;
using estimator::Pixels;
using estimator::Result;

Micros from_ms(double milliseconds) {
    return Micros{std::llround(milliseconds * 1000.0)};
}

Key<Settings> number(std::string name, Range range, std::function<void(Settings&, double)> set) {
    return number_key<Settings>(std::move(name), range, std::move(set));
}

Keys<Settings> movement_keys() {
    return {
        number("rest_ms", {20, 2000, "ms"},
               [](Settings& s, double v) { s.rules.segmentation.rest = from_ms(v); }),
        number("min_distance_px", {1, 1000, "px"},
               [](Settings& s, double v) { s.rules.segmentation.min_distance = Pixels::of(v); }),
        number("max_movement_time_ms", {100, 30'000, "ms"},
               [](Settings& s, double v) { s.rules.segmentation.max_movement_time = from_ms(v); }),
        number("max_dwell_ms", {0, 30'000, "ms"},
               [](Settings& s, double v) { s.rules.segmentation.max_dwell = from_ms(v); }),
        number("repeat_ms", {0, 5000, "ms"},
               [](Settings& s, double v) { s.rules.segmentation.repeat_time = from_ms(v); }),
        number("repeat_px", {0, 100, "px"},
               [](Settings& s, double v) { s.rules.segmentation.repeat_distance = Pixels::of(v); }),
        number("drag_px", {1, 100, "px"},
               [](Settings& s, double v) { s.rules.segmentation.drag_distance = Pixels::of(v); }),
    };
}

Keys<Settings> score_keys() {
    return {
        number("dead_band_px", {0, 50, "px"},
               [](Settings& s, double v) { s.rules.scores.dead_band = Pixels::of(v); }),
        number("dead_band_share", {0, 0.2, "of the distance"},
               [](Settings& s, double v) { s.rules.scores.dead_band_share = v; }),
        number("reference_width_px", {1, 1000, "px"},
               [](Settings& s, double v) { s.rules.scores.reference_width = Pixels::of(v); }),
    };
}

/// A path as people write it: ~/ is their home. Relative paths are refused, since a service and a
/// terminal start in different folders.
Result<void> read_store_file(const YamlValue& value, Settings& settings) {
    const auto text = value.text();
    if (!text) {
        return tl::unexpected{text.error()};
    }
    settings.store_file.reset();
    if (text->empty()) {
        return {};
    }
    if (text->starts_with("~/")) {
        const char* home = std::getenv("HOME");
        if (home == nullptr || *home == '\0') {
            return value.refuse(value.path() +
                                " begins with ~/, but HOME is not set; write the whole path");
        }
        settings.store_file = std::filesystem::path{home} / text->substr(2);
        return {};
    }
    if (text->front() != '/') {
        return value.must_be("a path that begins with / or ~/");
    }
    settings.store_file = *text;
    return {};
}

Keys<Settings> store_keys() {
    return {
        {"file", "a path that begins with / or ~/", read_store_file},
        choice_key<Settings>("detail", {"movements", "hours"},
                             [](Settings& s, std::size_t word) {
                                 s.detail = word == 0 ? Detail::movements : Detail::hours;
                             }),
        whole_number_key<Settings>(
            "keep_movements_days", {1, 36'500, "days"},
            [](Settings& s, std::int64_t v) { s.keep_movements = std::chrono::days{v}; }),
        whole_number_key<Settings>(
            "batch_s", {1, 3600, "s"},
            [](Settings& s, std::int64_t v) { s.batch_time = std::chrono::seconds{v}; }),
        whole_number_key<Settings>(
            "batch_movements", {1, 65'536, "movements"},
            [](Settings& s, std::int64_t v) { s.batch_movements = static_cast<std::size_t>(v); }),
    };
}

/// The look of an IANA name. Whether the zone exists is for the zone database to say.
bool looks_like_time_zone(std::string_view name) {
    constexpr std::size_t k_longest_name = 64;
    constexpr std::string_view k_allowed = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ"
                                           "0123456789_+-/";
    return name.size() <= k_longest_name && name.front() != '/' && name.back() != '/' &&
           name.find("//") == std::string_view::npos &&
           name.find_first_not_of(k_allowed) == std::string_view::npos;
}

Result<void> read_time_zone(const YamlValue& value, Settings& settings) {
    auto text = value.text();
    if (!text) {
        return tl::unexpected{text.error()};
    }
    if (!text->empty() && !looks_like_time_zone(*text)) {
        return value.must_be("a time zone's IANA name, e.g. Europe/Lisbon");
    }
    settings.time_zone = std::move(*text);
    return {};
}

Keys<Settings> week_keys() {
    return {
        number("standard_distance_px", {20, 4000, "px"},
               [](Settings& s, double v) { s.standard_distance = Pixels::of(v); }),
        number("confidence", {0.5, 0.999}, [](Settings& s, double v) { s.confidence = v; }),
        {"time_zone", "an IANA name", read_time_zone},
    };
}

Keys<Settings> log_keys() {
    static const std::vector<std::string> levels{"debug", "info", "warning", "error"};
    return {choice_key<Settings>(
        "level", levels, [](Settings& s, std::size_t word) { s.log_level = levels[word]; })};
}

Result<void> read_name(const YamlValue& value, PointerSettings& pointer) {
    auto text = value.text();
    if (!text) {
        return tl::unexpected{text.error()};
    }
    if (text->empty()) {
        return value.must_be("a pointer's name, in which * stands for any text");
    }
    pointer.name = std::move(*text);
    return {};
}

Keys<PointerSettings> pointer_keys(const std::filesystem::path& folder) {
    Key<PointerSettings> name{"name", "a pointer's name, in which * stands for any text",
                              read_name};
    name.required = true;
    return {
        std::move(name),
        number_key<PointerSettings>("cpi", {50, 50'000, "counts per inch"},
                                    [](PointerSettings& p, double v) { p.cpi = Cpi::of(v); }),
        {"gain", "a group of keys",
         [folder](const YamlValue& value, PointerSettings& pointer) {
             return read_gain(value, folder, pointer);
         },
         describe_gain()},
        truth_key<PointerSettings>("ignore", [](PointerSettings& p, bool v) { p.ignore = v; }),
    };
}

Key<Settings> pointers_key(const std::filesystem::path& folder) {
    Keys<PointerSettings> keys = pointer_keys(folder);
    std::vector<KeyDescription> inside = describe(keys);
    const auto read = [keys = std::move(keys)](const YamlValue& value,
                                               Settings& settings) -> Result<void> {
        const auto items = value.items();
        if (!items) {
            return tl::unexpected{items.error()};
        }
        for (const YamlValue& item : *items) {
            PointerSettings pointer;
            if (auto done = read_keys(item, keys, pointer); !done) {
                return done;
            }
            settings.pointers.push_back(std::move(pointer));
        }
        return {};
    };
    return {"pointers", "a list of pointers", read, std::move(inside)};
}

} // namespace

Keys<Settings> settings_keys(const std::filesystem::path& folder) {
    return {
        group_key<Settings>("movements", movement_keys()),
        group_key<Settings>("scores", score_keys()),
        group_key<Settings>("store", store_keys()),
        pointers_key(folder),
        group_key<Settings>("week", week_keys()),
        group_key<Settings>("log", log_keys()),
    };
}

std::vector<KeyDescription> describe_settings() {
    return describe(settings_keys({}));
}

} // namespace sagitta::config
