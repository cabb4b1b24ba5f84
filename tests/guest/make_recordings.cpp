// Writes the movements that the guest test sends, as raw recordings made by the simulated hand.
//   make_recordings FOLDER
#include "estimator/hand/aimed_path.hpp"
#include "estimator/hand/device.hpp"
#include "estimator/hand/person.hpp"
#include "input/raw_writer.hpp"

#include <cstdio>
#include <filesystem>

namespace {

using namespace sagitta::estimator;
using namespace std::chrono_literals;

constexpr double k_mm_per_px = k_mm_per_inch / 1000.0; // a 1000 CPI pointer at gain 1
constexpr Micros k_begin{1772614800'000'000};          // 2026-03-04T09:00:00Z
constexpr Micros k_hold = 70ms;
constexpr Micros k_rest = 450ms;

/// A hand that does one thing after another.
class Worker {
public:
    Worker(double reports_per_s, std::uint64_t seed)
        : m_device{PointerIndex{0},
                   {.reports_per_s = reports_per_s, .jitter = 0.0, .late_share = 0.0},
                   seed},
          m_random{seed} {}

    void click() {
        aim();
        m_device.press(m_now, Button::left, m_reports);
        release_and_rest();
    }
    void double_click() {
        aim();
        m_device.press(m_now, Button::left, m_reports);
        m_now += k_hold;
        m_device.release(m_now, Button::left, m_reports);
        m_now += 2 * k_hold;
        m_device.press(m_now, Button::left, m_reports);
        release_and_rest();
    }
    void drag() {
        aim();
        m_device.press(m_now, Button::left, m_reports);
        m_now += 2 * k_hold;
        aim();
        release_and_rest();
    }
    /// A movement that is never closed by a press.
    void reach() { aim(); }

    [[nodiscard]] const ReportBatch& reports() const { return m_reports; }

private:
    void aim() {
        const hand::AimTask task{Millimetres::of(m_random.log_normal(200.0, 0.6) * k_mm_per_px),
                                 Degrees::of(m_random.uniform(0.0, 360.0)),
                                 Millimetres::of(34.0 * k_mm_per_px)};
        const hand::AimedPath path = hand::aim(m_person, hand::Form{}, task, m_random);
        m_device.move(path, m_now, m_reports);
        m_now += Micros{static_cast<Micros::rep>(path.press_s() * 1e6)};
    }
    void release_and_rest() {
        m_now += k_hold;
        m_device.release(m_now, Button::left, m_reports);
        m_now += k_rest;
    }

    hand::Device m_device;
    hand::Random m_random;
    hand::Person m_person;
    PointerTime m_now{k_begin};
    ReportBatch m_reports;
};

bool write(const std::filesystem::path& file, const Worker& worker) {
    std::filesystem::remove(file);
    auto writer = sagitta::input::RawWriter::create(file);
    if (writer) {
        auto written = writer->write(worker.reports(), ClockOffset{});
        if (written) {
            written = writer->close();
        }
        if (written) {
            return true;
        }
        std::fprintf(stderr, "make_recordings: %s\n", written.error().message.c_str());
    } else {
        std::fprintf(stderr, "make_recordings: %s\n", writer.error().message.c_str());
    }
    return false;
}

/// `clicks` plain clicks, and among them drags and double clicks.
Worker desk_work(double reports_per_s, std::uint64_t seed, int clicks, int others) {
    Worker worker{reports_per_s, seed};
    for (int i = 0; i < clicks; ++i) {
        worker.click();
        if (i < others) {
            worker.drag();
            worker.double_click();
        }
    }
    return worker;
}

} // namespace

int main(int argc, char** argv) {
    if (argc != 2) {
        std::fputs("usage: make_recordings FOLDER\n", stderr);
        return 2;
    }
    const std::filesystem::path folder = argv[1];
    std::filesystem::create_directories(folder);
    Worker unplugged{100.0, 13};
    unplugged.reach();
    const bool written = write(folder / "simulated.raw", desk_work(1000.0, 11, 20, 2)) &&
                         write(folder / "usb.raw", desk_work(100.0, 12, 8, 1)) &&
                         write(folder / "unplugged.raw", unplugged) &&
                         write(folder / "replugged.raw", desk_work(100.0, 14, 3, 0)) &&
                         write(folder / "killed.raw", desk_work(1000.0, 15, 10, 0));
    return written ? 0 : 1;
}
