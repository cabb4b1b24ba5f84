// sagittad: parses arguments, wires the parts, maps errors to exit codes.
#include "daemon/daemon.hpp"
#include "daemon/logging.hpp"

#include <CLI/CLI.hpp>
#include <chrono>
#include <cstdio>
#include <exception>

namespace {

using namespace sagitta;

constexpr int k_done = 0;
constexpr int k_could_not = 1;
constexpr int k_wrong_usage = 2;

struct Arguments {
    std::string store_file;
    std::string config_file;
};

void describe(CLI::App& app, Arguments& arguments) {
    app.description("sagittad: measures how well a person points, from their everyday clicks.\n"
                    "Runs in the foreground and logs to standard error. SIGTERM stops it, SIGHUP\n"
                    "makes it read its config again.");
    app.add_option("--store", arguments.store_file,
                   "the file to write to (default: store.file of the config, else "
                   "~/.local/share/sagitta/sagitta.db)")
        ->type_name("FILE");
    app.add_option("--config", arguments.config_file,
                   "the config to read (default: ~/.config/sagitta/sagitta.yaml, else "
                   "/etc/sagitta/sagitta.yaml, else every default)")
        ->type_name("FILE");
    app.set_version_flag("--version", "sagittad " SAGITTA_VERSION);
    app.footer("Examples:\n"
               "  sagittad --store ~/trial.db       record to a file of your own\n"
               "  systemctl --user enable --now sagittad   record from every login on\n"
               "  sagitta check                     say what keeps recording from working");
}

int could_not(const estimator::Error& error) {
    std::fprintf(stderr, "sagittad: %s\n", error.message.c_str());
    return k_could_not;
}

int record(const Arguments& arguments) {
    const auto file = arguments.config_file.empty()
                          ? config::find_settings_file()
                          : std::optional<std::filesystem::path>{arguments.config_file};
    auto settings = file ? config::read_settings(*file)
                         : estimator::Result<config::Settings>{config::Settings{}};
    if (!settings) {
        return could_not(settings.error());
    }
    const auto log = daemon::make_logger(settings->log_level, daemon::stderr_is_journal());

    const auto now =
        std::chrono::time_point_cast<estimator::Micros>(std::chrono::system_clock::now());
    const std::filesystem::path store_file =
        !arguments.store_file.empty() ? std::filesystem::path{arguments.store_file}
                                      : settings->store_file.value_or(store::default_file());
    auto opened = store::Store::open(store_file, store::Mode::read_write, now);
    if (!opened) {
        log->error("{}", opened.error().message);
        return k_could_not;
    }
    daemon::Daemon sagittad{std::move(*settings),
                            arguments.config_file.empty() ? std::nullopt : file, std::move(*opened),
                            *log};
    if (const auto ended = sagittad.run(); !ended) {
        log->error("{}", ended.error().message);
        return k_could_not;
    }
    return k_done;
}

} // namespace

int main(int argc, char** argv) {
    Arguments arguments;
    try {
        CLI::App app;
        describe(app, arguments);
        try {
            app.parse(argc, argv);
        } catch (const CLI::ParseError& error) {
            return app.exit(error) == 0 ? k_done : k_wrong_usage;
        }
        return record(arguments);
    } catch (const std::exception& error) {
        std::fprintf(stderr, "sagittad: %s\n", error.what());
        return k_could_not;
    }
}
