// What the reader says of wrong settings, word for word.
#include "tests/config/helpers.hpp"

namespace sagitta::config {

TEST_CASE("an unknown key is refused with the nearest valid key") {
    CHECK(message_of("movements:\n  rest_sm: 200\n") ==
          "sagitta.yaml:2:3: unknown key 'rest_sm' in movements; did you mean 'rest_ms'?");
    CHECK(message_of("movments:\n  rest_ms: 200\n") ==
          "sagitta.yaml:1:1: unknown key 'movments'; did you mean 'movements'?");
    CHECK(refusal_of("movments: 1").code == estimator::ErrorCode::bad_value);
}

TEST_CASE("an unknown key that only lacks its unit is refused with the whole key") {
    CHECK(message_of("movements: {rest: 200}") ==
          "sagitta.yaml:1:13: unknown key 'rest' in movements; did you mean 'rest_ms'?");
}

TEST_CASE("a key outside its group is refused with the group") {
    CHECK(message_of("log: {level: info}\nrest_ms: 200\n") ==
          "sagitta.yaml:2:1: unknown key 'rest_ms'; did you mean 'movements.rest_ms'?");
}

TEST_CASE("an unknown key near to nothing is refused with all valid keys") {
    CHECK(message_of("colour: blue\n") ==
          "sagitta.yaml:1:1: unknown key 'colour'; the keys here are movements, scores, store, "
          "pointers, week and log");
}

TEST_CASE("a value out of range is refused with the range and its unit") {
    CHECK(message_of("movements:\n  rest_ms: 5\n") ==
          "sagitta.yaml:2:12: movements.rest_ms is '5', but must be 20 to 2000 ms");
    CHECK(message_of("week: {confidence: 1}") ==
          "sagitta.yaml:1:20: week.confidence is '1', but must be 0.5 to 0.999");
    CHECK(message_of("store: {keep_movements_days: 0}") ==
          "sagitta.yaml:1:30: store.keep_movements_days is '0', but must be 1 to 36500 days");
}

TEST_CASE("a value of another type is refused with what was read") {
    CHECK(message_of("movements:\n  rest_ms: fast\n") ==
          "sagitta.yaml:2:12: movements.rest_ms is 'fast', but must be a number, 20 to 2000 ms");
    CHECK(message_of("movements:\n  rest_ms: \"200\"\n") ==
          "sagitta.yaml:2:12: movements.rest_ms is the text '200', but must be a number, 20 to "
          "2000 ms");
    CHECK(message_of("movements:\n  rest_ms: [200]\n") ==
          "sagitta.yaml:2:12: movements.rest_ms is a list, but must be a number, 20 to 2000 ms");
    CHECK(message_of("movements:\n  rest_ms:\n") ==
          "sagitta.yaml:2:3: movements.rest_ms is empty, but must be a number, 20 to 2000 ms");
    CHECK(message_of("store: {batch_s: 1.5}") ==
          "sagitta.yaml:1:18: store.batch_s is '1.5', but must be a whole number, 1 to 3600 s");
    CHECK(message_of("store: {detail: days}") ==
          "sagitta.yaml:1:17: store.detail is 'days', but must be movements or hours");
    CHECK(message_of("log: {level: chatty}") ==
          "sagitta.yaml:1:14: log.level is 'chatty', but must be debug, info, warning or error");
    CHECK(message_of("log: info") ==
          "sagitta.yaml:1:6: log is 'info', but must be a group of keys");
    CHECK(message_of("pointers: {name: x}") ==
          "sagitta.yaml:1:11: pointers is a group of keys, but must be a list");
    CHECK(message_of("- log\n") ==
          "sagitta.yaml:1:1: the file is a list, but must be a group of keys");
    CHECK(message_of("pointers:\n  - name: x\n    ignore: yes\n") ==
          "sagitta.yaml:3:13: pointers[1].ignore is 'yes', but must be true or false");
}

TEST_CASE("a number that is not finite, or only begins as one, is refused") {
    for (const char* value : {".inf", "-.inf", ".nan", "nan", "inf", "infinity", "1e999", "200ms",
                              "0x50", "2_00", "+-200", "", "++200", "2e", "--200"}) {
        CAPTURE(value);
        CHECK_FALSE(
            parse_settings("movements: {rest_ms: " + std::string{value} + "}", "sagitta.yaml"));
    }
    for (const char* value : {"200", "200.0", "+200", "2e2", "2.0E+2"}) {
        CAPTURE(value);
        CHECK(settings_in("movements: {rest_ms: " + std::string{value} + "}")
                  .rules.segmentation.rest == std::chrono::milliseconds{200});
    }
}

TEST_CASE("a key that stands twice is refused with the line of the first") {
    CHECK(message_of("movements:\n  rest_ms: 200\n  repeat_px: 5\n  rest_ms: 300\n") ==
          "sagitta.yaml:4:3: this key stands already in line 2; keep one of them");
    CHECK(refusal_of("log:\nlog:\n").code == estimator::ErrorCode::bad_format);
}

TEST_CASE("columns count characters, not bytes") {
    CHECK(message_of("{\"log\": {\"lével\": info}}") ==
          "sagitta.yaml:1:10: unknown key 'lével' in log; did you mean 'level'?");
    CHECK(message_of("pointers: [{name: \"Zürich Büro\", cpi: 1}]") ==
          "sagitta.yaml:1:39: pointers[1].cpi is '1', but must be 50 to 50000 counts per inch");
}

TEST_CASE("a message shows control characters as codes and cuts long text") {
    CHECK(
        message_of("log: {level: \"\\e[31m\\n\\x85\"}") ==
        "sagitta.yaml:1:14: log.level is the text '\\x1B[31m\\x0A\\x85', but must be debug, info, "
        "warning or error");
    const std::string letters(100, 'a');
    CHECK(message_of("log: {level: " + letters + "}") ==
          "sagitta.yaml:1:14: log.level is '" + letters.substr(0, 40) +
              "...', but must be debug, info, warning or error");
}

TEST_CASE("a name or path with control characters is refused") {
    CHECK(
        message_of("store: {file: \"/srv/a\\0b\"}") ==
        "sagitta.yaml:1:15: store.file is the text '/srv/a\\x00b', but must be a text of one line "
        "without control characters");
    CHECK_FALSE(parse_settings("pointers: [{name: \"a\\nb\"}]", "f").has_value());
    CHECK_FALSE(parse_settings("pointers: [{name: \"a\\x9Bb\"}]", "f").has_value());
    CHECK_FALSE(
        parse_settings("pointers: [{name: a, gain: {model: table, file: \"g\\e.yaml\"}}]", "f")
            .has_value());
    CHECK(settings_in("pointers: [{name: \"Büro \\xB5\"}]").pointers[0].name == "Büro µ");
}

TEST_CASE("a store file that depends on the folder one stands in is refused") {
    CHECK(message_of("store: {file: pointing.db}") ==
          "sagitta.yaml:1:15: store.file is 'pointing.db', but must be a path that begins with / "
          "or ~/");
    const ScopedVariable home{"HOME", nullptr};
    CHECK(message_of("store: {file: ~/pointing.db}") ==
          "sagitta.yaml:1:15: store.file begins with ~/, but HOME is not set; write the whole "
          "path");
}

TEST_CASE("a time zone that cannot be one is refused") {
    for (const char* zone : {"../../etc/passwd", "/etc/localtime", "Europe/", "a//b", "Porto!"}) {
        CAPTURE(zone);
        CHECK(message_of("week: {time_zone: '" + std::string{zone} + "'}") ==
              "sagitta.yaml:1:19: week.time_zone is the text '" + std::string{zone} +
                  "', but must be a time zone's IANA name, e.g. Europe/Lisbon");
    }
}

TEST_CASE("a pointer without a name is refused") {
    CHECK(message_of("pointers:\n  - cpi: 800\n") ==
          "sagitta.yaml:2:5: pointers[1] lacks the key 'name'");
    CHECK(message_of("pointers:\n  - name: ''\n") ==
          "sagitta.yaml:2:11: pointers[1].name is the text '', but must be a pointer's name, in "
          "which * stands for any text");
}

} // namespace sagitta::config
