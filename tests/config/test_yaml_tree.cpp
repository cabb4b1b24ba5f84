// Documents that are broken, or YAML beyond what settings need.
#include "config/yaml_tree.hpp"
#include "tests/config/helpers.hpp"

namespace sagitta::config {
namespace {

std::string repeat(std::string_view text, std::size_t times) {
    std::string all;
    for (std::size_t i = 0; i < times; ++i) {
        all += text;
    }
    return all;
}

} // namespace

TEST_CASE("broken YAML is refused with the parser's place and reason") {
    CHECK(message_of("log:\n  level: info\n bad\n") ==
          "sagitta.yaml:3:2: not YAML: end of map not found");
    CHECK(message_of("log: {level: info") ==
          "sagitta.yaml:1:18: not YAML: end of map flow not found");
    CHECK(message_of("[log") ==
          "sagitta.yaml:1:1: a key must be plain text, or this bracket is never closed");
    CHECK(message_of("log: \"info") == "sagitta.yaml:1:11: not YAML: illegal EOF in scalar");
    CHECK(message_of("log: info: x") == "sagitta.yaml:1:10: not YAML: illegal map value");
    CHECK(refusal_of("\tlog: x").code == estimator::ErrorCode::bad_format);
}

TEST_CASE("nesting is read to 16 levels and refused beyond, however deep") {
    CHECK(parse_yaml(repeat("[", 16) + repeat("]", 16), "f").has_value());
    for (const std::size_t depth : {std::size_t{17}, std::size_t{1000}, std::size_t{10'000}}) {
        CAPTURE(depth);
        for (const char* opening : {"[", "{a: ", "- ", "? ", "[{a: ", "{? "}) {
            CAPTURE(opening);
            const std::string text = repeat(opening, depth);
            const auto document = parse_yaml(text, "f");
            REQUIRE_FALSE(document.has_value());
            CHECK(document.error().code == estimator::ErrorCode::bad_format);
        }
    }
    CHECK(message_of(repeat("[", 17) + repeat("]", 17)) ==
          "sagitta.yaml:1:17: nested deeper than 16 levels, the most a file may have");
}

TEST_CASE("a file with more values than any settings need is refused") {
    const auto document = parse_yaml("[" + repeat("1,", 60'000) + "]", "f");
    REQUIRE_FALSE(document.has_value());
    CHECK(document.error().message ==
          "f:1:100000: more than 50000 values, the most a file may hold");
}

TEST_CASE("anchors, aliases and tags are refused") {
    CHECK(message_of("log: &a {level: info}") ==
          "sagitta.yaml:1:6: anchors (&name) are not allowed; write the value out");
    CHECK(message_of("log: {level: &a info}") ==
          "sagitta.yaml:1:14: anchors (&name) are not allowed; write the value out");
    CHECK_FALSE(parse_yaml("a: *b", "f").has_value());
    CHECK(message_of("log: !!map {level: info}") ==
          "sagitta.yaml:1:6: tags (!name) are not allowed; write the value without");
    CHECK(message_of("log: {level: !!str info}") ==
          "sagitta.yaml:1:14: tags (!name) are not allowed; write the value without");
}

TEST_CASE("a second document or stray text after the first is refused") {
    CHECK(message_of("log: {level: info}\n---\nlog: {level: debug}\n") ==
          "sagitta.yaml:2:1: the document should end here; a file holds only one");
    CHECK_FALSE(parse_yaml("a: 1\n]\n", "f").has_value());
    CHECK(parse_yaml("---\na: 1\n...\n", "f").has_value());
}

TEST_CASE("a key that is not plain text is refused") {
    CHECK(message_of("? [a, b]\n: 1\n") ==
          "sagitta.yaml:1:3: a key must be plain text, or this bracket is never closed");
    CHECK(message_of("~: 1\n") == "sagitta.yaml:1:1: a key must be plain text");
    CHECK(message_of("? {a: 1}\n: 1\n") ==
          "sagitta.yaml:1:3: a key must be plain text, or this bracket is never closed");
}

TEST_CASE("the tree keeps kinds, quotes and places") {
    const std::string text = "a: [1, '2', ~]\nb:\nc: {d: e}\n";
    const auto document = parse_yaml(text, "f");
    REQUIRE(document.has_value());
    const auto& entries = document->root.children;
    REQUIRE(entries.size() == 3);
    CHECK(document->root.kind == YamlNode::Kind::map);
    CHECK(entries[0].key == "a");
    REQUIRE(entries[0].children.size() == 3);
    CHECK_FALSE(entries[0].children[0].quoted);
    CHECK(entries[0].children[1].quoted);
    CHECK(entries[0].children[1].offset == text.find("'2'"));
    CHECK(entries[0].children[2].kind == YamlNode::Kind::empty);
    CHECK(entries[1].kind == YamlNode::Kind::empty);
    CHECK(entries[1].offset == text.find("b:"));
    CHECK(entries[2].children[0].key_offset == text.find("d:"));
    CHECK(entries[2].children[0].text == "e");
}

TEST_CASE("the example file cut at any byte is read or refused, never worse") {
    const std::string text =
        slurp(std::filesystem::path{SAGITTA_SOURCE_DIR} / "config" / "sagitta.yaml");
    std::size_t read = 0;
    std::size_t refused = 0;
    for (std::size_t length = 0; length <= text.size(); length += 31) {
        const auto settings = parse_settings(std::string_view{text}.substr(0, length), "f");
        ++(settings ? read : refused);
        CHECK((settings || settings.error().message.starts_with("f:")));
    }
    CHECK(refused > 0);
    CHECK(read > 0);
}

} // namespace sagitta::config
