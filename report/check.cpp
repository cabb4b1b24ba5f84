#include "report/check.hpp"

#include "report/daemon_client.hpp"
#include "report/table.hpp"

#include <algorithm>
#include <fmt/format.h>
#include <nlohmann/json.hpp>
#include <unistd.h>

namespace sagitta::report {
namespace {

using Json = nlohmann::ordered_json;
using Findings = std::vector<Finding>;

constexpr const char* k_reload_rules =
    "sudo udevadm control --reload && sudo udevadm trigger --subsystem-match=input "
    "--action=change";

std::string quoted_name(const input::PointerNode& node) {
    return fmt::format("'{}' ({})", printable(node.description.name), node.node.string());
}

void judge_config(const CheckFacts& facts, Findings& findings) {
    if (facts.config_error) {
        findings.push_back({Severity::trouble, "the config is wrong: " + *facts.config_error,
                            "mend that line, or move the file away: every key has a default"});
    } else if (facts.config_file) {
        findings.push_back(
            {Severity::fine, "config " + facts.config_file->string() + " is right", ""});
    } else {
        findings.push_back({Severity::fine, "no config file, so the defaults hold", ""});
    }
    if (!facts.time_zone_remark.empty()) {
        findings.push_back({Severity::advice, facts.time_zone_remark, "sudo apt install tzdata"});
    }
}

void judge_unreadable(const DeviceHere& device, const CheckFacts& facts, Findings& findings) {
    const std::string name = quoted_name(device.node);
    if (!facts.udev_rule_installed) {
        findings.push_back({Severity::trouble,
                            name + " is not readable: the udev rule that opens pointers to the "
                                   "person at the seat is not installed",
                            fmt::format("install the package sagitta, then: {}", k_reload_rules)});
        return;
    }
    findings.push_back(
        {Severity::trouble,
         name + " is not readable although the udev rule is installed: it took no effect yet, or "
                "this session is not the active one at the seat (as over ssh)",
         fmt::format("log in at the machine itself, or: {}", k_reload_rules)});
}

void judge_pointers(const CheckFacts& facts, Findings& findings) {
    if (facts.pointers_error) {
        findings.push_back({Severity::trouble,
                            "pointers could not be listed: " + *facts.pointers_error,
                            "ls -l /sys/class/input /dev/input"});
        return;
    }
    if (facts.pointers.empty()) {
        findings.push_back({Severity::trouble, "no pointer was found on this machine",
                            "plug one in, then run 'sagitta devices'"});
    }
    for (const DeviceHere& device : facts.pointers) {
        if (device.ignored) {
            findings.push_back(
                {Severity::fine, quoted_name(device.node) + " is ignored, as the config asks", ""});
        } else if (!device.node.readable) {
            judge_unreadable(device, facts, findings);
        } else if (device.cpi_source == estimator::CpiSource::assumed) {
            findings.push_back(
                {Severity::advice,
                 fmt::format("{} is readable, but its CPI is assumed to be {:.0f}: lengths in mm "
                             "are a guess",
                             quoted_name(device.node), device.cpi.value()),
                 "set cpi under its name in the config (it is in the maker's data sheet)"});
        } else {
            findings.push_back({Severity::fine, quoted_name(device.node) + " is readable", ""});
        }
    }
    for (const input::PointerNode& node : facts.keyboard_pointers) {
        findings.push_back(
            {Severity::advice,
             quoted_name(node) + " is a pointer and a keyboard at once; it is never "
                                 "opened, so that keys stay unread",
             "nothing if its receiver shows another pointer above, else use another one"});
    }
}

void judge_store(const CheckFacts& facts, Findings& findings) {
    const std::string file = facts.store_file.string();
    if (facts.store_error) {
        findings.push_back({Severity::trouble, *facts.store_error,
                            "name another file with store in the config, or mend this one"});
    } else if (!facts.store_writable) {
        const std::string folder = facts.store_file.parent_path().string();
        findings.push_back(
            {Severity::trouble,
             fmt::format("the store {} cannot be {} by this user", file,
                         facts.store_exists ? "written" : "made"),
             facts.store_exists
                 ? fmt::format("ls -l '{}', then: chmod u+rw '{}' (or chown it)", file, file)
                 : fmt::format("mkdir -p '{}' && chmod u+rwx '{}'", folder, folder)});
    } else {
        findings.push_back({Severity::fine,
                            facts.store_exists
                                ? "the store " + file + " can be read and written"
                                : "there is no store yet; recording will make " + file,
                            ""});
    }
}

void judge_daemon(const CheckFacts& facts, Findings& findings) {
    if (facts.daemon_error) {
        findings.push_back(
            {Severity::trouble, *facts.daemon_error, "systemctl --user enable --now sagittad"});
        return;
    }
    if (facts.daemon_state == "paused") {
        findings.push_back({Severity::trouble, "sagittad is running but paused", "sagitta resume"});
    } else if (facts.daemon_state == "session_inactive") {
        findings.push_back({Severity::trouble,
                            "sagittad is running but does not read, since this session is not the "
                            "active one at its seat",
                            "log in at the machine itself"});
    } else if (facts.daemon_state == "no_pointer") {
        findings.push_back({Severity::trouble, "sagittad is running but has no pointer to read",
                            "mend the pointers named above; it opens them by itself then"});
    } else {
        findings.push_back({Severity::fine, "sagittad is running and recording", ""});
    }
    for (const std::string& why : facts.daemon_refused) {
        findings.push_back({Severity::advice,
                            fmt::format("sagittad left a pointer out: {}", printable(why)),
                            "journalctl --user -u sagittad"});
    }
    if (facts.daemon_write_failure) {
        findings.push_back(
            {Severity::trouble,
             fmt::format("sagittad could not write: {}", printable(*facts.daemon_write_failure)),
             "journalctl --user -u sagittad"});
    }
}

bool rule_installed() {
    for (const char* folder : {"/etc/udev/rules.d", "/run/udev/rules.d", "/usr/lib/udev/rules.d",
                               "/lib/udev/rules.d", "/usr/local/lib/udev/rules.d"}) {
        std::error_code error;
        for (const auto& entry : std::filesystem::directory_iterator{folder, error}) {
            if (entry.path().filename().string().find("sagitta") != std::string::npos) {
                return true;
            }
        }
    }
    return false;
}

/// Whether the file, or else the nearest folder above it that exists, can be written.
bool can_write(std::filesystem::path path) {
    std::error_code error;
    if (std::filesystem::exists(path, error)) {
        return ::access(path.c_str(), R_OK | W_OK) == 0 &&
               ::access(std::filesystem::absolute(path, error).parent_path().c_str(), W_OK) == 0;
    }
    path = std::filesystem::absolute(path, error).parent_path();
    while (path.has_relative_path() && !std::filesystem::exists(path, error)) {
        path = path.parent_path();
    }
    return std::filesystem::is_directory(path, error) && ::access(path.c_str(), W_OK | X_OK) == 0;
}

void look_at_store(const Session& session, CheckFacts& facts) {
    std::error_code error;
    facts.store_file = std::filesystem::absolute(session.store_file, error);
    facts.store_exists = std::filesystem::exists(session.store_file, error);
    facts.store_writable = can_write(session.store_file);
    if (facts.store_exists) {
        store::OpenOptions options;
        options.thorough = true;
        const auto opened =
            store::Store::open(session.store_file, store::Mode::read_only, session.now, options);
        if (!opened) {
            facts.store_error = opened.error().message;
        }
    }
}

void look_at_daemon(CheckFacts& facts) {
    const auto status = ask_daemon("status");
    if (!status) {
        // What mends it stands beside the finding.
        facts.daemon_error = status.error().code == estimator::ErrorCode::not_found
                                 ? "sagittad is not running"
                                 : status.error().message;
        return;
    }
    try {
        facts.daemon_state = status->value("state", "");
        facts.daemon_refused = status->value("refused", std::vector<std::string>{});
        if (status->contains("write_failure") && status->at("write_failure").is_string()) {
            facts.daemon_write_failure = status->at("write_failure").get<std::string>();
        }
    } catch (const nlohmann::json::exception&) {
        facts.daemon_error = "sagittad answered in a form that this program does not know";
    }
}

const char* severity_name(Severity severity) {
    switch (severity) {
    case Severity::fine:
        return "fine";
    case Severity::advice:
        return "advice";
    case Severity::trouble:
        return "trouble";
    }
    return "";
}

std::size_t troubles(const Findings& findings) {
    return static_cast<std::size_t>(
        std::count_if(findings.begin(), findings.end(),
                      [](const Finding& f) { return f.severity == Severity::trouble; }));
}

} // namespace

Findings judge(const CheckFacts& facts) {
    Findings findings;
    judge_config(facts, findings);
    judge_pointers(facts, findings);
    judge_store(facts, findings);
    judge_daemon(facts, findings);
    return findings;
}

std::string check_text(const Findings& findings, const Session& session) {
    const std::size_t count = troubles(findings);
    std::string text = count == 0 ? "Nothing keeps Sagitta from recording.\n"
                                  : fmt::format("{} Sagitta from recording.\n",
                                                count == 1 ? "One thing keeps"
                                                           : fmt::format("{} things keep", count));
    for (const Finding& finding : findings) {
        const char* mark = finding.severity == Severity::trouble  ? "[mend]  "
                           : finding.severity == Severity::advice ? "[note]  "
                                                                  : "[fine]  ";
        std::string lines = wrapped(finding.what, 86);
        std::string indented;
        for (std::size_t begin = 0; begin < lines.size();) {
            const std::size_t end = lines.find('\n', begin) + 1;
            indented += begin == 0 ? mark : "        ";
            indented += lines.substr(begin, end - begin);
            begin = end;
        }
        text += "\n" + (finding.severity == Severity::trouble ? session.style.warning(indented)
                                                              : indented);
        if (!finding.mend.empty()) {
            text += "        -> " + finding.mend + "\n";
        }
    }
    return text;
}

std::string check_json(const Findings& findings) {
    Json json = {{"recording_works", troubles(findings) == 0}, {"findings", Json::array()}};
    for (const Finding& finding : findings) {
        json["findings"].push_back({{"severity", severity_name(finding.severity)},
                                    {"what", finding.what},
                                    {"mend", finding.mend}});
    }
    return json.dump(2, ' ', false, Json::error_handler_t::replace) + "\n";
}

Result<Output> run_check(const Session& session, std::optional<std::filesystem::path> config_file,
                         std::optional<std::string> config_error) {
    CheckFacts facts;
    facts.config_file = std::move(config_file);
    facts.config_error = std::move(config_error);
    facts.time_zone_remark = session.calendar.remark();
    if (auto nodes = input::list_pointers()) {
        facts.pointers = describe_devices(std::move(*nodes), session.settings);
    } else {
        facts.pointers_error = nodes.error().message;
    }
    if (auto nodes = input::list_keyboard_pointers()) {
        facts.keyboard_pointers = std::move(*nodes);
    }
    facts.udev_rule_installed = rule_installed();
    look_at_store(session, facts);
    look_at_daemon(facts);
    const Findings findings = judge(facts);
    return Output{session.json ? check_json(findings) : check_text(findings, session),
                  troubles(findings) == 0};
}

} // namespace sagitta::report
