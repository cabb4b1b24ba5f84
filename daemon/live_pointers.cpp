#include "daemon/live_pointers.hpp"

#include <algorithm>
#include <set>
#include <tuple>

namespace sagitta::daemon {

namespace asio = boost::asio;
using estimator::PointerDescription;
using estimator::PointerIndex;
using estimator::Report;

struct LivePointers::Slot {
    Slot(asio::io_context& loop, PointerIndex slot_index) : index{slot_index}, waiter{loop} {}

    PointerIndex index;
    std::unique_ptr<OpenPointer> pointer; ///< null: closed
    std::filesystem::path node;
    asio::posix::stream_descriptor waiter; ///< borrows the pointer's descriptor while it waits
    bool moving = false;
    BatchRhythm rhythm;
};

namespace {

bool same_device(const PointerDescription& a, const PointerDescription& b) {
    return std::tie(a.name, a.bus, a.vendor, a.product, a.kind) ==
           std::tie(b.name, b.bus, b.vendor, b.product, b.kind);
}

bool earlier(const Report& a, const Report& b) {
    return a.time < b.time;
}

} // namespace

LivePointers::LivePointers(asio::io_context& loop, PointerDevices& devices,
                           std::function<void()> ready)
    : m_loop{loop}, m_devices{devices}, m_ready{std::move(ready)},
      m_filter{[](const PointerDescription&) { return true; }}, m_timer{loop} {}

LivePointers::~LivePointers() {
    for (const auto& slot : m_slots) {
        close(*slot);
    }
}

void LivePointers::look_again() {
    m_look = true;
    m_ready();
}

estimator::Result<void> LivePointers::next(estimator::ReportBatch& batch) {
    batch.clear();
    read_moving(batch);
    if (m_look && m_enabled) {
        m_look = false;
        scan();
    }
    schedule();
    return {};
}

void LivePointers::read_moving(estimator::ReportBatch& batch) {
    for (const auto& slot : m_slots) {
        if (!slot->moving) {
            continue;
        }
        const std::size_t before = batch.size();
        const auto read = slot->pointer->read(batch);
        slot->rhythm.learn(std::span{batch}.subspan(before));
        std::inplace_merge(batch.begin(), batch.begin() + static_cast<std::ptrdiff_t>(before),
                           batch.end(), earlier);
        if (!read) {
            close(*slot);
            m_look = true;
            m_changes.push_back(
                {PointerChange::Kind::unplugged, slot->index, read.error().message});
        } else if (batch.size() == before) {
            wait_for_motion(*slot);
        }
    }
}

void LivePointers::scan() {
    const auto nodes = m_devices.list();
    if (!nodes) {
        refuse("/dev/input", nodes.error().message);
        return;
    }
    std::set<std::filesystem::path> present;
    for (const input::PointerNode& node : *nodes) {
        present.insert(node.node);
        const bool open_already =
            std::any_of(m_slots.begin(), m_slots.end(),
                        [&](const auto& slot) { return slot->pointer && slot->node == node.node; });
        if (!open_already && m_filter(node.description)) {
            open(node);
        }
    }
    // A node that comes back may be refused, and told, once more.
    for (auto told = m_refused.begin(); told != m_refused.end();) {
        told = present.count(told->first) == 0 ? m_refused.erase(told) : std::next(told);
    }
}

void LivePointers::open(const input::PointerNode& node) {
    Slot* slot = slot_for(node.description);
    if (slot == nullptr) {
        refuse(node.node, "more than 256 different pointers since the start; restart sagittad to "
                          "read " +
                              node.node.string() + " (" + node.description.name + ")");
        return;
    }
    auto opened = m_devices.open(node, slot->index);
    if (!opened) {
        refuse(node.node, opened.error().message);
        return;
    }
    m_refused.erase(node.node);
    slot->pointer = std::move(*opened);
    slot->node = node.node;
    slot->rhythm = BatchRhythm{};
    m_descriptions[static_cast<std::size_t>(slot->index)] = node.description;
    m_changes.push_back({PointerChange::Kind::plugged, slot->index, {}});
    wait_for_motion(*slot);
}

void LivePointers::refuse(const std::filesystem::path& node, std::string message) {
    std::string& told = m_refused[node];
    if (told != message) {
        told = message;
        m_changes.push_back({PointerChange::Kind::refused, PointerIndex{}, std::move(message)});
    }
}

// A replugged pointer gets its old place, so that places do not run out.
LivePointers::Slot* LivePointers::slot_for(const PointerDescription& description) {
    for (std::size_t i = 0; i < m_slots.size(); ++i) {
        if (!m_slots[i]->pointer && same_device(m_descriptions[i], description)) {
            return m_slots[i].get();
        }
    }
    if (m_slots.size() == estimator::k_max_pointers) {
        return nullptr;
    }
    const auto index = static_cast<PointerIndex>(m_slots.size());
    m_slots.push_back(std::make_unique<Slot>(m_loop, index));
    m_descriptions.push_back(description);
    return m_slots.back().get();
}

void LivePointers::wait_for_motion(Slot& slot) {
    slot.moving = false;
    boost::system::error_code error;
    slot.waiter.assign(slot.pointer->file_descriptor(), error);
    if (error) {
        m_changes.push_back({PointerChange::Kind::unplugged, slot.index,
                             "cannot wait for " + slot.node.string() + ": " + error.message()});
        close(slot);
        return;
    }
    slot.waiter.async_wait(asio::posix::stream_descriptor::wait_read,
                           [this, &slot](const boost::system::error_code& failed) {
                               if (failed || !slot.pointer || slot.moving) {
                                   return;
                               }
                               // Out of the loop: else every further event would wake it.
                               slot.waiter.release();
                               slot.moving = true;
                               schedule();
                           });
}

void LivePointers::close(Slot& slot) {
    if (slot.waiter.is_open()) {
        slot.waiter.release();
    }
    slot.pointer.reset();
    slot.moving = false;
}

// The timer runs at the pace of the fastest moving pointer, and not at all when none moves.
void LivePointers::schedule() {
    std::optional<estimator::Micros> period;
    for (const auto& slot : m_slots) {
        if (slot->moving) {
            period = std::min(period.value_or(k_longest_period), slot->rhythm.period());
        }
    }
    if (!period) {
        return;
    }
    if (m_scheduled && *m_scheduled <= *period) {
        return; // a reading is due soon enough
    }
    m_scheduled = period;
    m_timer.expires_after(*period);
    m_timer.async_wait([this](const boost::system::error_code& failed) {
        if (failed) {
            return; // superseded
        }
        m_scheduled.reset();
        m_ready();
    });
}

std::span<const PointerDescription> LivePointers::pointers() const {
    return m_descriptions;
}

std::vector<PointerChange> LivePointers::take_changes() {
    return std::exchange(m_changes, {});
}

void LivePointers::enable(bool on) {
    if (on == m_enabled) {
        return;
    }
    m_enabled = on;
    if (on) {
        m_look = true;
        return;
    }
    for (const auto& slot : m_slots) {
        close(*slot);
    }
    m_timer.cancel();
    m_scheduled.reset();
}

void LivePointers::set_filter(Filter filter) {
    m_filter = std::move(filter);
    for (std::size_t i = 0; i < m_slots.size(); ++i) {
        if (m_slots[i]->pointer && !m_filter(m_descriptions[i])) {
            close(*m_slots[i]);
            m_changes.push_back({PointerChange::Kind::unplugged, m_slots[i]->index,
                                 m_descriptions[i].name + " is ignored by the config now"});
        }
    }
    m_look = true;
}

std::vector<std::string> LivePointers::refused() const {
    std::vector<std::string> messages;
    for (const auto& [node, message] : m_refused) {
        messages.push_back(message);
    }
    return messages;
}

bool LivePointers::is_open(PointerIndex pointer) const {
    const auto index = static_cast<std::size_t>(pointer);
    return index < m_slots.size() && m_slots[index]->pointer != nullptr;
}

} // namespace sagitta::daemon
