#include "daemon/control_protocol.hpp"

#include <algorithm>
#include <nlohmann/json.hpp>

namespace sagitta::daemon {

namespace {

using nlohmann::ordered_json;

// Names of devices and labels come from outside: bytes that are not UTF-8 become U+FFFD.
std::string dump(const ordered_json& json) {
    return json.dump(-1, ' ', false, ordered_json::error_handler_t::replace);
}

std::string done() {
    return dump({{"ok", true}});
}

std::string done(const estimator::Result<void>& result) {
    return result ? done() : refusal(result.error().message);
}

std::string describe(const Status& status) {
    ordered_json outcomes = ordered_json::object();
    for (std::size_t i = 0; i < status.outcomes.size(); ++i) {
        const auto outcome = static_cast<estimator::Outcome>(i);
        outcomes[std::string{to_text(outcome)}] = status.outcomes[i];
    }
    ordered_json pointers = ordered_json::array();
    for (const PointerStatus& pointer : status.pointers) {
        pointers.push_back({{"name", pointer.name},
                            {"kind", pointer.kind},
                            {"cpi", pointer.cpi},
                            {"cpi_source", pointer.cpi_source},
                            {"open", pointer.open}});
    }
    ordered_json json{{"ok", true},
                      {"version", status.version},
                      {"state", status.state},
                      {"store", status.store_file},
                      {"condition", status.condition},
                      {"pointers", pointers},
                      {"refused", status.refused},
                      {"presses", status.presses},
                      {"outcomes", outcomes},
                      {"unwritten", status.unwritten},
                      {"write_failure", nullptr},
                      {"lost_movements", status.lost_movements}};
    if (status.write_failure) {
        json["write_failure"] = *status.write_failure;
    }
    return dump(json);
}

bool is_utf8(std::string_view text) {
    try {
        static_cast<void>(nlohmann::json(std::string{text}).dump());
        return true;
    } catch (const nlohmann::json::exception&) {
        return false;
    }
}

bool has_control_character(std::string_view text) {
    return std::any_of(text.begin(), text.end(), [](char c) {
        const auto byte = static_cast<unsigned char>(c);
        return byte < 0x20 || byte == 0x7f;
    });
}

std::string_view trim(std::string_view text) {
    const auto first = text.find_first_not_of(" \t\r");
    if (first == std::string_view::npos) {
        return {};
    }
    return text.substr(first, text.find_last_not_of(" \t\r") - first + 1);
}

std::string set_label(ControlTarget& target, std::string_view label) {
    if (label.size() > k_longest_label) {
        return refusal("a label has at most 200 bytes; shorten it");
    }
    if (!is_utf8(label) || has_control_character(label)) {
        return refusal("a label is UTF-8 text without control characters; retype it");
    }
    return done(target.label(std::string{label}));
}

} // namespace

std::string refusal(std::string_view error) {
    return dump({{"ok", false}, {"error", error}});
}

std::string answer(ControlTarget& target, std::string_view request) {
    const std::string_view text = trim(request);
    const std::string_view verb = text.substr(0, text.find(' '));
    const std::string_view argument = trim(text.substr(verb.size()));
    if (verb == "label") {
        return set_label(target, argument);
    }
    if (!argument.empty()) {
        return refusal("only label takes a text; say status, pause, resume or flush alone");
    }
    if (verb == "status") {
        return describe(target.status());
    }
    if (verb == "pause") {
        target.pause();
        return done();
    }
    if (verb == "resume") {
        target.resume();
        return done();
    }
    if (verb == "flush") {
        return done(target.flush());
    }
    return refusal("unknown request; say status, pause, resume, label TEXT or flush");
}

} // namespace sagitta::daemon
