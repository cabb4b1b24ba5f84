// The sagitta command: parses arguments, wires the parts, maps errors to exit codes.
#include "config/nearest.hpp"
#include "report/check.hpp"
#include "report/daemon_client.hpp"
#include "report/demo.hpp"
#include "report/devices.hpp"
#include "report/export.hpp"
#include "report/record.hpp"
#include "report/replay.hpp"
#include "report/table.hpp"
#include "report/week.hpp"

#include <CLI/CLI.hpp>
#include <cerrno>
#include <cstdio>
#include <cstdlib>
#include <cstring>
#include <functional>
#include <string>
#include <unistd.h>

namespace {

using namespace sagitta;
using report::Output;
using report::Session;

constexpr int k_done = 0;
constexpr int k_could_not = 1;
constexpr int k_wrong_usage = 2;

/// Options that several commands share.
struct Common {
    std::string store_file;
    std::string config_file;
    bool json = false;
};

/// The command that the line asks for, ready to run once the session stands.
struct Command {
    std::string name;
    std::function<estimator::Result<Output>(const Session&)> run;
    bool survives_wrong_config = false;
};

struct ConfigFound {
    std::optional<std::filesystem::path> file;
    std::optional<std::string> error;
};

CLI::Validator date_validator() {
    return {[](std::string& text) {
                const auto day = report::parse_day(text);
                return day ? std::string{} : day.error().message;
            },
            ""};
}

CLI::Validator time_validator() {
    return {[](std::string& text) {
                const auto time = report::parse_time(text, report::Calendar::in_utc());
                return time ? std::string{} : time.error().message;
            },
            ""};
}

/// A range that the option's own text tells of.
template <class Number>
CLI::Validator within(Number low, Number high) {
    return CLI::Range(low, high).description("");
}

/// Turns one of the words into its value.
template <class Value>
CLI::Validator one_of(const std::map<std::string, Value>& words) {
    return CLI::CheckedTransformer(words).description("");
}

void add_common(CLI::App& app, Common& common, bool with_json) {
    app.add_option("--store", common.store_file, "the store's file")->type_name("FILE");
    app.add_option("--config", common.config_file, "the config file")->type_name("FILE");
    if (with_json) {
        app.add_flag("--json", common.json, "print JSON");
    }
}

CLI::App* add_command(CLI::App& app, Common& common, const char* name, const char* purpose,
                      const char* example, bool with_json = true) {
    CLI::App* command = app.add_subcommand(name, purpose);
    command->footer(std::string{"Example: "} + example);
    add_common(*command, common, with_json);
    return command;
}

void add_week(CLI::App& app, Common& common, Command& chosen) {
    CLI::App* command = add_command(
        app, common, "week", "how a week went beside the four weeks before, and what changed",
        "sagitta week --ending 2026-11-29 --by direction");
    auto request = std::make_shared<report::WeekRequest>();
    command->add_option("--ending", request->ending, "a day of the ISO week (default: today)")
        ->check(date_validator())
        ->type_name("DATE");
    const std::map<std::string, report::WeekDetail> details = {
        {"direction", report::WeekDetail::by_direction}, {"hour", report::WeekDetail::by_hour}};
    command->add_option("--by", request->detail, "instead of the summary: by direction or by hour")
        ->transform(one_of(details))
        ->type_name("direction|hour");
    command->callback([&chosen, request] {
        chosen = {"week", [request](const Session& s) { return report::run_week(*request, s); }};
    });
}

void add_devices(CLI::App& app, Common& common, Command& chosen) {
    CLI::App* command =
        add_command(app, common, "devices", "the pointers of this machine and those in the store",
                    "sagitta devices --json");
    command->callback([&chosen] { chosen = {"devices", report::run_devices}; });
}

void add_replay(CLI::App& app, Common& common, Command& chosen) {
    CLI::App* command = add_command(
        app, common, "replay",
        "score recordings: raw input events, evemu text or libinput-record YAML",
        "sagitta replay --store trial.db --pointer 'Upright mouse' --cpi 1000 monday.raw");
    auto request = std::make_shared<report::ReplayRequest>();
    command->add_option("RECORDING", request->recordings, "files, replayed one after the other")
        ->required()
        ->type_name("");
    command->add_option("--pointer", request->pointer, "name of the recording's pointer")
        ->type_name("NAME");
    command->add_option("--cpi", request->cpi, "counts per inch of the pointer, 50 to 50000")
        ->check(within(50.0, 50'000.0))
        ->type_name("N");
    command->add_option("--gain", request->gain, "screen px per count, 0.001 to 1000")
        ->check(within(0.001, 1000.0))
        ->type_name("F");
    command
        ->add_option("--start", request->start,
                     "when the recording began; needed with --store when its stamps are not UTC")
        ->check(time_validator())
        ->type_name("TIME");
    command->callback([&chosen, request] {
        if (request->start && request->recordings.size() > 1) {
            throw CLI::ValidationError("--start tells when one recording began; give one "
                                       "RECORDING with it");
        }
        chosen = {"replay",
                  [request](const Session& s) { return report::run_replay(*request, s); }};
    });
}

void add_record(CLI::App& app, Common& common, Command& chosen) {
    CLI::App* command =
        add_command(app, common, "record", "record a live pointer into a raw file, until Ctrl-C",
                    "sagitta record --pointer 'Thumb trackball' --for 600 trial.raw");
    auto request = std::make_shared<report::RecordRequest>();
    auto seconds = std::make_shared<std::optional<double>>();
    command->add_option("FILE", request->file, "the file to make")->required()->type_name("");
    command->add_option("--pointer", request->pointer, "name or node (default: the only one)")
        ->type_name("NAME");
    command->add_option("--for", *seconds, "end after this long")
        ->check(within(0.001, 31'536'000.0))
        ->type_name("SECONDS");
    command->callback([&chosen, request, seconds] {
        if (*seconds) {
            request->length = std::chrono::duration<double>{**seconds};
        }
        chosen = {"record",
                  [request](const Session& s) { return report::run_record(*request, s); }};
    });
}

void add_export(CLI::App& app, Common& common, Command& chosen) {
    CLI::App* command = add_command(
        app, common, "export", "every row, for other programs",
        "sagitta export --from 2026-11-23 --to 2026-11-30 --format csv > week48.csv", false);
    command->footer(
        "Times are ISO 8601 in UTC; numbers read back exactly. --from and --to take a date, which\n"
        "is its first moment in your time zone, or a time such as 2026-11-23T09:30:00Z; --to "
        "itself\n"
        "is left out. The time of a movement is its press.\n"
        "flags: 1 = CPI assumed, 2 = started in motion, 3 = both.\n\n" +
        command->get_footer());
    auto request = std::make_shared<report::ExportRequest>();
    const std::map<std::string, report::ExportTable> tables = {
        {"movements", report::ExportTable::movements}, {"hours", report::ExportTable::hours}};
    const std::map<std::string, report::RowFormat> formats = {{"csv", report::RowFormat::csv},
                                                              {"jsonl", report::RowFormat::jsonl}};
    command->add_option("--table", request->table, "which rows (default: movements)")
        ->transform(one_of(tables))
        ->type_name("movements|hours");
    command->add_option("--format", request->format, "how to write rows")
        ->required()
        ->transform(one_of(formats))
        ->type_name("csv|jsonl");
    command->add_option("--from", request->from, "only rows from this time on")
        ->check(time_validator())
        ->type_name("TIME");
    command->add_option("--to", request->to, "only rows before this time")
        ->check(time_validator())
        ->type_name("TIME");
    command->add_option("--pointer", request->pointer, "only this pointer")->type_name("NAME");
    command->callback([&chosen, request] {
        chosen = {"export",
                  [request](const Session& s) { return report::run_export(*request, s, stdout); }};
    });
}

void add_check(CLI::App& app, Common& common, Command& chosen, ConfigFound& config) {
    CLI::App* command =
        add_command(app, common, "check", "what keeps recording from working, and how to mend it",
                    "sagitta check");
    command->callback([&chosen, &config] {
        chosen = {
            "check",
            [&config](const Session& s) { return report::run_check(s, config.file, config.error); },
            true};
    });
}

void add_demo(CLI::App& app, Common& common, Command& chosen) {
    CLI::App* command =
        add_command(app, common, "demo", "weeks of a simulated desk through the real pipeline",
                    "sagitta demo --weeks 8 --store demo.db");
    auto request = std::make_shared<report::DemoRequest>();
    command->add_option("--weeks", request->weeks, "how many, 1 to 52 (default: 6)")
        ->check(within(1, 52))
        ->type_name("N");
    command->callback([&chosen, request] {
        chosen = {"demo", [request](const Session& s) { return report::run_demo(*request, s); }};
    });
}

void add_daemon_orders(CLI::App& app, Common& common, Command& chosen) {
    using report::DaemonOrder;
    auto label = std::make_shared<std::string>();
    const auto add = [&](const char* name, const char* purpose, const char* example,
                         DaemonOrder order) {
        CLI::App* command = add_command(app, common, name, purpose, example);
        command->callback([&chosen, name, label, order] {
            chosen = {name, [label, order](const Session& s) {
                          return report::run_daemon_order(order, *label, s);
                      }};
        });
        return command;
    };
    add("status", "what the daemon is doing", "sagitta status --json", DaemonOrder::status);
    add("pause", "stop recording until resume", "sagitta pause", DaemonOrder::pause);
    add("resume", "go on recording", "sagitta resume", DaemonOrder::resume);
    add("label", "name the condition of what follows; '' for none", "sagitta label 'left hand'",
        DaemonOrder::label)
        ->add_option("TEXT", *label, "the condition")
        ->required()
        ->type_name("");
}

/// Reads the settings; a wrong config is kept in `config` for the command that can live with it.
estimator::Result<Session> make_session(const Common& common, const Command& command,
                                        ConfigFound& config) {
    if (!common.config_file.empty()) {
        config.file = common.config_file;
    } else {
        config.file = config::find_settings_file();
    }
    config::Settings settings;
    if (config.file) {
        auto read = config::read_settings(*config.file);
        if (read) {
            settings = std::move(*read);
        } else if (command.survives_wrong_config) {
            config.error = read.error().message;
        } else {
            return tl::unexpected{read.error()};
        }
    }
    auto calendar = report::Calendar::in_zone(settings.time_zone);
    if (!calendar && command.survives_wrong_config) {
        config.error = calendar.error().message;
        calendar = report::Calendar::in_utc();
    }
    if (!calendar) {
        return tl::unexpected{calendar.error()};
    }
    const char* no_color = std::getenv("NO_COLOR");
    const char* terminal = std::getenv("TERM");
    const bool plain = (no_color != nullptr && *no_color != '\0') || terminal == nullptr ||
                       std::strcmp(terminal, "dumb") == 0;
    const auto now = std::chrono::floor<estimator::Micros>(std::chrono::system_clock::now());
    const bool named = !common.store_file.empty();
    const std::filesystem::path store_file =
        named ? std::filesystem::path{common.store_file}
              : settings.store_file.value_or(store::default_file());
    const report::Style style{!plain && ::isatty(STDOUT_FILENO) == 1};
    const bool show_progress = !plain && ::isatty(STDERR_FILENO) == 1;
    return Session{std::move(settings), *calendar, now,          store_file, named,
                   common.json,         style,     show_progress};
}

int complain(const std::string& who, const std::string& what, int code) {
    std::fprintf(stderr, "%s: %s\n", who.c_str(), what.c_str());
    return code;
}

int run(const Common& common, const Command& command, ConfigFound& config) {
    const std::string who = "sagitta " + command.name;
    const auto session = make_session(common, command, config);
    if (!session) {
        return complain(who, session.error().message, k_could_not);
    }
    const auto output = command.run(*session);
    if (!output) {
        return complain(who, output.error().message, k_could_not);
    }
    const bool written =
        std::fwrite(output->text.data(), 1, output->text.size(), stdout) == output->text.size() &&
        std::fflush(stdout) == 0;
    if (const int error = errno; !written && error != EPIPE) {
        return complain(who,
                        std::string{"standard output could not be written: "} +
                            std::strerror(error) + "; choose another place and try again",
                        k_could_not);
    }
    return output->all_well ? k_done : k_could_not;
}

/// What to say to a line without a known command.
std::string no_command_text(const CLI::App& app) {
    std::vector<std::string> known;
    for (const CLI::App* command : app.get_subcommands(nullptr)) {
        known.push_back(command->get_name());
    }
    for (const std::string& word : app.remaining()) {
        if (!word.starts_with('-')) {
            const auto meant = config::nearest(word, known);
            return "'" + report::printable(word) + "' is not a command" +
                   (meant ? " (did you mean " + *meant + "?)" : std::string{});
        }
    }
    return "a command is needed, such as week or demo";
}

int parse_and_run(int argc, char** argv) {
    CLI::App app{"Sagitta measures how well you point, from your everyday clicks.", "sagitta"};
    app.set_help_flag("-h,--help", "print this help");
    app.set_version_flag("--version", "sagitta " SAGITTA_VERSION, "print the version");
    app.footer("Each command tells more: sagitta week --help\nExample: sagitta demo");
    app.require_subcommand(1);
    app.get_formatter()->column_width(26);
    Common common;
    Command command;
    ConfigFound config;
    add_common(app, common, true);
    add_week(app, common, command);
    add_devices(app, common, command);
    add_replay(app, common, command);
    add_record(app, common, command);
    add_export(app, common, command);
    add_check(app, common, command, config);
    add_demo(app, common, command);
    add_daemon_orders(app, common, command);
    try {
        app.parse(argc, argv);
    } catch (const CLI::Success& wanted) { // --help, --version
        return app.exit(wanted);
    } catch (const CLI::ParseError& error) {
        const auto chosen = app.get_subcommands();
        const std::string who =
            chosen.empty() ? "sagitta" : "sagitta " + chosen.front()->get_name();
        const bool no_command =
            chosen.empty() && dynamic_cast<const CLI::RequiredError*>(&error) != nullptr;
        const std::string what = no_command ? no_command_text(app) : std::string{error.what()};
        return complain(who, what + "; see '" + who + " --help'", k_wrong_usage);
    }
    return run(common, command, config);
}

} // namespace

int main(int argc, char** argv) {
    try {
        return parse_and_run(argc, argv);
    } catch (const std::exception& error) {
        return complain("sagitta",
                        std::string{"stopped by an unforeseen failure: "} + error.what() +
                            "; please report it with what you asked for",
                        k_could_not);
    }
}
