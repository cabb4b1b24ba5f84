#include "daemon/daemon.hpp"

#include "daemon/clock_watch.hpp"
#include "daemon/control_socket.hpp"
#include "daemon/hot_plug.hpp"
#include "daemon/live_pointers.hpp"
#include "daemon/logging.hpp"
#include "daemon/recording_session.hpp"
#include "daemon/service_manager.hpp"
#include "daemon/session_activity.hpp"

#include <boost/asio/io_context.hpp>
#include <boost/asio/signal_set.hpp>
#include <boost/asio/steady_timer.hpp>
#include <csignal>

namespace sagitta::daemon {

namespace asio = boost::asio;
using boost::system::error_code;
using estimator::Result;

struct Daemon::State {
    State(config::Settings read, std::optional<std::filesystem::path> file, store::Opened opened,
          spdlog::logger& logger)
        : log{logger}, config_file{std::move(file)}, store{std::move(opened.store)},
          set_aside{std::move(opened.set_aside)}, batch_time{read.batch_time},
          pointers{loop, devices, [this] { turn(); }}, session{std::move(read),
                                                               {pointers, clocks, store, log},
                                                               SAGITTA_VERSION},
          activity{loop,
                   [this](bool active) {
                       session.set_session_active(active);
                       after_turn();
                   }},
          signals{loop, SIGTERM, SIGINT, SIGHUP}, batch_timer{loop}, watchdog_timer{loop} {}

    [[nodiscard]] Result<void> start();
    [[nodiscard]] Result<void> open_control_socket();
    void turn();
    void after_turn();
    void wait_for_signal();
    void on_signal(int number);
    void reload();
    void wait_for_watchdog(std::chrono::microseconds period);
    [[nodiscard]] std::string describe() const;

    spdlog::logger& log;
    std::optional<std::filesystem::path> config_file;
    store::Store store;
    std::optional<std::filesystem::path> set_aside;
    std::chrono::seconds batch_time;

    asio::io_context loop{1};
    KernelPointerDevices devices;
    SystemClocks clocks;
    LivePointers pointers;
    RecordingSession session;
    SessionActivity activity;
    std::unique_ptr<HotPlug> hot_plug;
    std::unique_ptr<ControlSocket> control;
    asio::signal_set signals;
    asio::steady_timer batch_timer;
    bool batch_due = false; ///< the batch timer runs
    asio::steady_timer watchdog_timer;
};

Result<void> Daemon::State::start() {
    if (auto opened = open_control_socket(); !opened) {
        return opened;
    }
    auto watched = HotPlug::watch(loop, "/dev/input", [this] { pointers.look_again(); });
    if (watched) {
        hot_plug = std::move(*watched);
    } else {
        log.warn("{}, ignoring", watched.error().message);
    }
    wait_for_signal();
    session.set_session_active(activity.active());
    session.start(set_aside);
    after_turn();
    if (const auto period = ServiceManager::watchdog()) {
        wait_for_watchdog(*period / 2);
    }
    ServiceManager::ready(describe());
    log.info("sagittad {} writes to {}", SAGITTA_VERSION, store.file().string());
    return {};
}

Result<void> Daemon::State::open_control_socket() {
    const std::filesystem::path dir = default_control_dir();
    if (dir.empty()) {
        log.warn("XDG_RUNTIME_DIR is not set, so there is no control socket, ignoring");
        return {};
    }
    auto listening = ControlSocket::listen(loop, dir, [this](std::string_view request) {
        std::string reply = answer(session, request);
        after_turn();
        return reply;
    });
    if (!listening) {
        return tl::unexpected{listening.error()};
    }
    control = std::move(*listening);
    return {};
}

void Daemon::State::turn() {
    session.turn();
    after_turn();
}

// The timer runs only while something waits to be written, so that an idle daemon sleeps on.
void Daemon::State::after_turn() {
    if (batch_due || !session.unwritten()) {
        return;
    }
    batch_due = true;
    batch_timer.expires_after(batch_time);
    batch_timer.async_wait([this](error_code failed) {
        if (failed) {
            return;
        }
        batch_due = false;
        session.flush_in_time();
        after_turn();
    });
}

void Daemon::State::wait_for_signal() {
    signals.async_wait([this](error_code failed, int number) {
        if (!failed) {
            wait_for_signal();
            on_signal(number);
        }
    });
}

void Daemon::State::on_signal(int number) {
    if (number == SIGHUP) {
        reload();
        return;
    }
    log.info("stopping");
    ServiceManager::stopping();
    loop.stop();
}

void Daemon::State::reload() {
    ServiceManager::reloading();
    const auto file = config_file ? config_file : config::find_settings_file();
    auto settings =
        file ? config::read_settings(*file) : Result<config::Settings>{config::Settings{}};
    if (!settings) {
        log.error("{}; the old settings stay", settings.error().message);
    } else {
        const auto new_batch_time = settings->batch_time;
        const auto new_level = settings->log_level;
        if (const auto applied = session.apply(std::move(*settings)); applied) {
            batch_time = new_batch_time;
            set_level(log, new_level);
            log.info("settings read again{}", file ? " from " + file->string() : "");
        } else {
            log.error("{}; the old settings stay", applied.error().message);
        }
        after_turn();
    }
    ServiceManager::ready(describe());
}

void Daemon::State::wait_for_watchdog(std::chrono::microseconds period) {
    ServiceManager::alive();
    watchdog_timer.expires_after(period);
    watchdog_timer.async_wait([this, period](error_code failed) {
        if (!failed) {
            wait_for_watchdog(period);
        }
    });
}

std::string Daemon::State::describe() const {
    return session.status().state == "recording" ? "Recording"
                                                 : "Not recording: " + session.status().state;
}

Daemon::Daemon(config::Settings settings, std::optional<std::filesystem::path> config_file,
               store::Opened opened, spdlog::logger& log)
    : m_state{std::make_unique<State>(std::move(settings), std::move(config_file),
                                      std::move(opened), log)} {}

Daemon::~Daemon() = default;

Result<void> Daemon::run() {
    if (auto started = m_state->start(); !started) {
        return started;
    }
    m_state->loop.run();
    return m_state->session.stop();
}

} // namespace sagitta::daemon
