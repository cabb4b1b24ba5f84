// Tells when devices come, go, or change hands: by udev's monitor where udev runs, and by inotify
// on /dev/input, which also sees a seat's change of permissions. One thread.
#pragma once

#include "estimator/result.hpp"

#include <boost/asio/io_context.hpp>
#include <filesystem>
#include <functional>
#include <memory>

namespace sagitta::daemon {

class HotPlug {
public:
    /// @param changed    called in the loop, once for a burst of news
    /// @param input_dir  /dev/input; it need not exist yet
    /// @return io when the kernel gives no inotify
    [[nodiscard]] static estimator::Result<std::unique_ptr<HotPlug>>
    watch(boost::asio::io_context& loop, const std::filesystem::path& input_dir,
          std::function<void()> changed);

    HotPlug(const HotPlug&) = delete;
    HotPlug& operator=(const HotPlug&) = delete;
    ~HotPlug();

private:
    struct State;
    explicit HotPlug(std::unique_ptr<State> state);
    std::unique_ptr<State> m_state;
};

} // namespace sagitta::daemon
