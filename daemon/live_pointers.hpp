// The live pointers of this machine as a source of reports, on one Boost.Asio loop. One thread.
//
// A still pointer waits for its first event in the loop. A moving one is taken out of the loop and
// read by a timer, so that the kernel gathers many reports for one wake-up; when a reading finds
// nothing it goes back to waiting. Hence an idle daemon is never woken.
#pragma once

#include "daemon/batch_rhythm.hpp"
#include "daemon/pointer_devices.hpp"
#include "daemon/pointer_feed.hpp"

#include <boost/asio/io_context.hpp>
#include <boost/asio/posix/stream_descriptor.hpp>
#include <boost/asio/steady_timer.hpp>
#include <filesystem>
#include <map>
#include <memory>
#include <optional>

namespace sagitta::daemon {

class LivePointers final : public PointerFeed {
public:
    /// @param devices  outlives this object
    /// @param ready    called in the loop when next() has something to do
    LivePointers(boost::asio::io_context& loop, PointerDevices& devices,
                 std::function<void()> ready);
    ~LivePointers() override;

    /// Devices came or went: the next next() looks for pointers again.
    void look_again();

    [[nodiscard]] estimator::Result<void> next(estimator::ReportBatch& batch) override;
    [[nodiscard]] std::span<const estimator::PointerDescription> pointers() const override;
    [[nodiscard]] std::vector<PointerChange> take_changes() override;
    void enable(bool on) override;
    void set_filter(Filter filter) override;
    [[nodiscard]] std::vector<std::string> refused() const override;
    [[nodiscard]] bool is_open(estimator::PointerIndex pointer) const override;

private:
    struct Slot; ///< one PointerIndex

    void read_moving(estimator::ReportBatch& batch);
    void scan();
    void open(const input::PointerNode& node);
    void refuse(const std::filesystem::path& node, std::string message);
    [[nodiscard]] Slot* slot_for(const estimator::PointerDescription& description);
    void wait_for_motion(Slot& slot);
    void close(Slot& slot);
    void schedule();

    boost::asio::io_context& m_loop;
    PointerDevices& m_devices;
    std::function<void()> m_ready;
    Filter m_filter;
    boost::asio::steady_timer m_timer;
    std::optional<estimator::Micros> m_scheduled; ///< period of the running timer
    std::vector<std::unique_ptr<Slot>> m_slots;   ///< by PointerIndex; kept when unplugged
    std::vector<estimator::PointerDescription> m_descriptions; ///< by PointerIndex
    std::vector<PointerChange> m_changes;
    std::map<std::filesystem::path, std::string> m_refused; ///< by node
    bool m_enabled = false;
    bool m_look = false;
};

} // namespace sagitta::daemon
