#include "config/settings_keys.hpp"
#include "tests/config/helpers.hpp"

#include <regex>
#include <set>
#include <sstream>

namespace sagitta::config {
namespace {

const std::filesystem::path k_example =
    std::filesystem::path{SAGITTA_SOURCE_DIR} / "config" / "sagitta.yaml";

void check_equal(const Settings& a, const Settings& b) {
    const auto& left = a.rules.segmentation;
    const auto& right = b.rules.segmentation;
    CHECK(left.rest == right.rest);
    CHECK(left.min_distance == right.min_distance);
    CHECK(left.max_movement_time == right.max_movement_time);
    CHECK(left.max_dwell == right.max_dwell);
    CHECK(left.repeat_time == right.repeat_time);
    CHECK(left.repeat_distance == right.repeat_distance);
    CHECK(left.drag_distance == right.drag_distance);
    CHECK(a.rules.scores.dead_band == b.rules.scores.dead_band);
    CHECK(a.rules.scores.dead_band_share == b.rules.scores.dead_band_share);
    CHECK(a.rules.scores.reference_width == b.rules.scores.reference_width);
    CHECK(a.pointers.size() == b.pointers.size());
    CHECK(a.store_file == b.store_file);
    CHECK(a.detail == b.detail);
    CHECK(a.keep_movements == b.keep_movements);
    CHECK(a.batch_time == b.batch_time);
    CHECK(a.batch_movements == b.batch_movements);
    CHECK(a.standard_distance == b.standard_distance);
    CHECK(a.confidence == b.confidence);
    CHECK(a.time_zone == b.time_zone);
    CHECK(a.log_level == b.log_level);
}

/// The example with its entries under `pointers` taken out of their comments.
std::string example_with_pointers() {
    std::istringstream lines{slurp(k_example)};
    const std::regex entry{"^#(  +(- )?[a-z_]+:.*)$"};
    std::string text;
    for (std::string line; std::getline(lines, line);) {
        std::smatch match;
        if (line == "pointers: []") {
            line = "pointers:";
        } else if (std::regex_match(line, match, entry)) {
            line = match[1];
        }
        text += line + "\n";
    }
    return text;
}

/// The dotted paths of all maps in a tree; lists add nothing to them.
void collect_paths(const YamlNode& node, const std::string& above, std::set<std::string>& paths) {
    for (const YamlNode& child : node.children) {
        std::string path = above;
        if (node.kind == YamlNode::Kind::map) {
            path += (above.empty() ? "" : ".") + child.key;
            paths.insert(path);
        }
        collect_paths(child, path, paths);
    }
}

} // namespace

TEST_CASE("the example file reads as the defaults") {
    const auto settings = read_settings(k_example);
    REQUIRE_MESSAGE(settings.has_value(), settings.error().message);
    check_equal(*settings, Settings{});
}

TEST_CASE("the example file holds every key of the reader and no other") {
    std::set<std::string> known;
    for (const KeyDescription& key : describe_settings()) {
        known.insert(key.path);
    }
    const auto document = parse_yaml(example_with_pointers(), k_example);
    REQUIRE_MESSAGE(document.has_value(), document.error().message);
    std::set<std::string> written;
    collect_paths(document->root, "", written);
    for (const std::string& path : known) {
        CHECK_MESSAGE(written.contains(path), path << " is missing from the example");
    }
    for (const std::string& path : written) {
        CHECK_MESSAGE(known.contains(path), path << " is not known to the reader");
    }
}

TEST_CASE("the example file names the range of every number") {
    const std::string text = slurp(k_example);
    std::size_t ranges = 0;
    for (const KeyDescription& key : describe_settings()) {
        if (key.allowed.find(" to ") == std::string::npos || key.path.ends_with(".points")) {
            continue;
        }
        CHECK_MESSAGE(text.find(key.allowed) != std::string::npos,
                      key.path << " allows " << key.allowed);
        ++ranges;
    }
    CHECK(ranges == 18);
}

TEST_CASE("the pointer entries in the example's comments are right") {
    const auto settings = parse_settings(example_with_pointers(), k_example);
    REQUIRE_MESSAGE(settings.has_value(), settings.error().message);
    REQUIRE(settings->pointers.size() == 3);
    CHECK(settings->pointers[0].name == "Example Upright Mouse*");
    CHECK(settings->pointers[0].cpi == estimator::Cpi::of(1600.0));
    CHECK(settings->pointers[0].gain.is_flat());
    CHECK_FALSE(settings->pointers[1].gain.is_flat());
    CHECK_FALSE(settings->pointers[2].gain.is_flat());
}

TEST_CASE("a file changes what it names and leaves the rest at its default") {
    const Settings settings = settings_in("movements: {rest_ms: 150.5}\n"
                                          "store:\n"
                                          "  file: /srv/desk/pointing.db\n"
                                          "  detail: hours\n"
                                          "  batch_movements: 16\n"
                                          "week: {time_zone: Europe/Lisbon}\n"
                                          "log: {level: warning}\n");
    Settings expected;
    expected.rules.segmentation.rest = std::chrono::microseconds{150'500};
    expected.store_file = "/srv/desk/pointing.db";
    expected.detail = Detail::hours;
    expected.batch_movements = 16;
    expected.time_zone = "Europe/Lisbon";
    expected.log_level = "warning";
    check_equal(settings, expected);
}

TEST_CASE("empty content, comments and empty groups mean the defaults") {
    for (const char* text : {"", "\n\n", "# nothing\n", "---\n", "{}", "movements:\npointers:\n"}) {
        CAPTURE(text);
        check_equal(settings_in(text), Settings{});
    }
}

TEST_CASE("every end of every range is allowed and what lies beyond is refused") {
    std::size_t tried = 0;
    const std::regex range{"(\\S+) to (\\S+)( .*)?"};
    for (const KeyDescription& key : describe_settings()) {
        std::smatch match;
        const std::size_t dot = key.path.find('.');
        if (key.path.starts_with("pointers") || !std::regex_match(key.allowed, match, range)) {
            continue;
        }
        const auto with = [&](const std::string& value) {
            return parse_settings(key.path.substr(0, dot) + ": {" + key.path.substr(dot + 1) +
                                      ": " + value + "}",
                                  "sagitta.yaml");
        };
        CAPTURE(key.path);
        CHECK(with(match[1]).has_value());
        CHECK(with(match[2]).has_value());
        CHECK_FALSE(with("-1").has_value());
        CHECK_FALSE(
            with(match[2].str() + (match[2].str().find('.') == std::string::npos ? "0" : "9"))
                .has_value());
        ++tried;
    }
    CHECK(tried == 15);
}

TEST_CASE("a store file below ~/ lies in the person's home") {
    const ScopedVariable home{"HOME", "/home/desk"};
    CHECK(settings_in("store: {file: ~/pointing.db}").store_file == "/home/desk/pointing.db");
}

} // namespace sagitta::config
