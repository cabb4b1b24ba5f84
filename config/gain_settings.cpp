#include "config/gain_settings.hpp"

#include <string>
#include <utility>
#include <vector>

namespace sagitta::config {
namespace {

using estimator::Cpi;
using estimator::Gain;
using estimator::GainPoint;
using estimator::MillimetresPerSecond;
using estimator::Result;

const Range k_speed{0.0, 100'000.0, "mm/s"};
const Range k_factor{0.001, 1000.0, "px per count"};

/// The keys as read, before they are known to fit together.
struct GainKeys {
    std::size_t model = 0;
    std::optional<YamlValue> factor_value;
    double factor = 1.0;
    std::optional<YamlValue> file_value;
    std::string file;
    std::optional<YamlValue> points_value;
    std::vector<GainPoint> points;
    std::optional<YamlValue> normalised_value;
    std::optional<Cpi> normalised_to;
};

enum Model : std::size_t { flat, table };

Result<GainPoint> read_point(const YamlValue& value) {
    const auto pair = value.items();
    if (!pair) {
        return tl::unexpected{pair.error()};
    }
    if (pair->size() != 2) {
        return value.must_be("a pair [speed in mm/s, factor in px per count]");
    }
    const auto speed = (*pair)[0].number(k_speed);
    if (!speed) {
        return tl::unexpected{speed.error()};
    }
    const auto factor = (*pair)[1].number(k_factor);
    if (!factor) {
        return tl::unexpected{factor.error()};
    }
    return GainPoint{MillimetresPerSecond::of(*speed), *factor};
}

Result<void> read_points(const YamlValue& value, GainKeys& keys) {
    const auto items = value.items();
    if (!items) {
        return tl::unexpected{items.error()};
    }
    if (items->empty()) {
        return value.must_be("a list of at least one pair [speed in mm/s, factor in px per count]");
    }
    for (const YamlValue& item : *items) {
        const auto point = read_point(item);
        if (!point) {
            return tl::unexpected{point.error()};
        }
        if (!keys.points.empty() && point->speed <= keys.points.back().speed) {
            return item.refuse(item.path() +
                               " does not increase; each speed must be above that of the point "
                               "before");
        }
        keys.points.push_back(*point);
    }
    keys.points_value = value;
    return {};
}

Key<GainKeys> points_key() {
    return {"points", "pairs [" + k_speed.text() + ", " + k_factor.text() + "]", read_points};
}

Key<GainKeys> normalised_key() {
    const Range range{100.0, 10'000.0, "counts per inch"};
    return {"normalised_to_cpi", range.text(), [range](const YamlValue& value, GainKeys& keys) {
                keys.normalised_value = value;
                return take(value.number(range),
                            [&](double cpi) { keys.normalised_to = Cpi::of(cpi); });
            }};
}

const Keys<GainKeys>& gain_keys() {
    static const Keys<GainKeys> keys{
        choice_key<GainKeys>("model", {"flat", "table"},
                             [](GainKeys& gain, std::size_t model) { gain.model = model; }),
        {"factor", k_factor.text(),
         [](const YamlValue& value, GainKeys& gain) {
             gain.factor_value = value;
             return take(value.number(k_factor), [&](double factor) { gain.factor = factor; });
         }},
        {"file", "a file name",
         [](const YamlValue& value, GainKeys& gain) {
             gain.file_value = value;
             return take(value.text(), [&](std::string file) { gain.file = std::move(file); });
         }},
        points_key(),
        normalised_key(),
    };
    return keys;
}

Result<GainTable> make_table(const YamlValue& value, GainKeys keys) {
    auto gain = Gain::table(std::move(keys.points));
    if (!gain) {
        return value.refuse(gain.error().message);
    }
    return GainTable{std::move(*gain), keys.normalised_to};
}

Result<void> refuse_beside(const std::optional<YamlValue>& value, const std::string& why) {
    return value ? Result<void>{value->refuse_key(value->path() + " does not belong here: " + why)}
                 : Result<void>{};
}

Result<void> read_flat(const YamlValue& value, const GainKeys& keys, PointerSettings& pointer) {
    for (const auto& other : {keys.file_value, keys.points_value, keys.normalised_value}) {
        if (auto refused = refuse_beside(other, "the model is flat; write 'model: table'");
            !refused) {
            return refused;
        }
    }
    auto gain = Gain::flat(keys.factor);
    if (!gain) {
        return value.refuse(gain.error().message);
    }
    pointer.gain = std::move(*gain);
    return {};
}

Result<void> read_table(const YamlValue& value, GainKeys keys, const std::filesystem::path& folder,
                        PointerSettings& pointer) {
    if (auto refused = refuse_beside(keys.factor_value, "the model is table"); !refused) {
        return refused;
    }
    if (keys.file.empty() && !keys.points_value) {
        return value.refuse(value.path() +
                            " is a table without points; give 'points' or a 'file' of them");
    }
    if (!keys.file.empty()) {
        for (const auto& other : {keys.points_value, keys.normalised_value}) {
            if (auto refused = refuse_beside(other, "it stands in the table's file"); !refused) {
                return refused;
            }
        }
    }
    auto table = keys.file.empty() ? make_table(value, std::move(keys))
                                   : read_gain_table(folder / keys.file);
    if (!table) {
        return tl::unexpected{std::move(table.error())};
    }
    pointer.gain = std::move(table->gain);
    pointer.gain_normalised_to = table->normalised_to;
    return {};
}

} // namespace

Result<void> read_gain(const YamlValue& value, const std::filesystem::path& folder,
                       PointerSettings& pointer) {
    GainKeys keys;
    if (auto read = read_keys(value, gain_keys(), keys); !read) {
        return read;
    }
    return keys.model == Model::flat ? read_flat(value, keys, pointer)
                                     : read_table(value, std::move(keys), folder, pointer);
}

Result<GainTable> read_gain_table(const std::filesystem::path& file) {
    const auto text = read_text_file(file);
    if (!text) {
        return tl::unexpected{text.error()};
    }
    const auto document = parse_yaml(*text, file);
    if (!document) {
        return tl::unexpected{document.error()};
    }
    const YamlValue root{*document};
    Keys<GainKeys> table_keys{points_key(), normalised_key()};
    table_keys.front().required = true;
    GainKeys keys;
    if (auto read = read_keys(root, table_keys, keys); !read) {
        return tl::unexpected{std::move(read.error())};
    }
    return make_table(root, std::move(keys));
}

std::vector<KeyDescription> describe_gain() {
    return describe(gain_keys());
}

} // namespace sagitta::config
