#include "daemon/hot_plug.hpp"

#include <array>
#include <boost/asio/posix/stream_descriptor.hpp>
#include <cerrno>
#include <cstring>
#include <fmt/format.h>
#include <libudev.h>
#include <sys/inotify.h>
#include <unistd.h>

namespace sagitta::daemon {

namespace asio = boost::asio;
using asio::posix::stream_descriptor;

namespace {

struct UdevDeleter {
    void operator()(udev* context) const { udev_unref(context); }
    void operator()(udev_monitor* monitor) const { udev_monitor_unref(monitor); }
    void operator()(udev_device* device) const { udev_device_unref(device); }
};
using Udev = std::unique_ptr<udev, UdevDeleter>;
using Monitor = std::unique_ptr<udev_monitor, UdevDeleter>;
using Device = std::unique_ptr<udev_device, UdevDeleter>;

bool udev_runs() {
    return access("/run/udev/control", F_OK) == 0;
}

// The "udev" group: messages sent after the rules have run, so that marks and permissions stand.
Monitor monitor_input(udev* context) {
    Monitor monitor{udev_monitor_new_from_netlink(context, "udev")};
    if (monitor &&
        udev_monitor_filter_add_match_subsystem_devtype(monitor.get(), "input", nullptr) >= 0 &&
        udev_monitor_enable_receiving(monitor.get()) >= 0) {
        return monitor;
    }
    return {};
}

} // namespace

struct HotPlug::State {
    State(asio::io_context& loop, std::filesystem::path dir, std::function<void()> callback)
        : input_dir{std::move(dir)}, changed{std::move(callback)}, inotify{loop}, netlink{loop} {}
    ~State() {
        if (netlink.is_open()) {
            netlink.release(); // the monitor's own
        }
    }
    State(const State&) = delete;
    State& operator=(const State&) = delete;

    void watch_dir();
    void wait_inotify();
    void wait_netlink();

    std::filesystem::path input_dir;
    std::function<void()> changed;
    stream_descriptor inotify;
    Udev context;
    Monitor monitor;
    stream_descriptor netlink;
};

// Without any input device there is no /dev/input; then its parent tells when it comes.
void HotPlug::State::watch_dir() {
    const int fd = inotify.native_handle();
    if (inotify_add_watch(fd, input_dir.c_str(), IN_CREATE | IN_DELETE | IN_ATTRIB) < 0) {
        inotify_add_watch(fd, input_dir.parent_path().c_str(), IN_CREATE | IN_ONLYDIR);
    }
}

void HotPlug::State::wait_inotify() {
    inotify.async_wait(stream_descriptor::wait_read, [this](boost::system::error_code failed) {
        if (failed) {
            return;
        }
        alignas(inotify_event) std::array<char, 4096> news{};
        while (::read(inotify.native_handle(), news.data(), news.size()) > 0) {
        }
        watch_dir();
        wait_inotify();
        changed();
    });
}

void HotPlug::State::wait_netlink() {
    netlink.async_wait(stream_descriptor::wait_read, [this](boost::system::error_code failed) {
        if (failed) {
            return;
        }
        bool news = false;
        while (const Device device{udev_monitor_receive_device(monitor.get())}) {
            news = true;
        }
        wait_netlink();
        if (news) {
            changed();
        }
    });
}

estimator::Result<std::unique_ptr<HotPlug>> HotPlug::watch(asio::io_context& loop,
                                                           const std::filesystem::path& input_dir,
                                                           std::function<void()> changed) {
    auto state = std::make_unique<State>(loop, input_dir, std::move(changed));
    const int fd = inotify_init1(IN_CLOEXEC | IN_NONBLOCK);
    if (fd < 0) {
        const int reason = errno;
        return estimator::fail(
            estimator::ErrorCode::io,
            fmt::format("cannot watch {} for new pointers: {}; raise fs.inotify.max_user_instances",
                        input_dir.string(), std::strerror(reason)));
    }
    boost::system::error_code error;
    state->inotify.assign(fd, error);
    if (error) {
        ::close(fd);
        return estimator::fail(estimator::ErrorCode::io,
                               fmt::format("cannot wait for new pointers: {}", error.message()));
    }
    state->watch_dir();
    state->wait_inotify();

    if (udev_runs()) {
        state->context.reset(udev_new());
        state->monitor = monitor_input(state->context.get());
        if (state->monitor) {
            state->netlink.assign(udev_monitor_get_fd(state->monitor.get()), error);
            if (!error) {
                state->wait_netlink();
            }
        }
    }
    return std::unique_ptr<HotPlug>{new HotPlug{std::move(state)}};
}

HotPlug::HotPlug(std::unique_ptr<State> state) : m_state{std::move(state)} {}
HotPlug::~HotPlug() = default;

} // namespace sagitta::daemon
