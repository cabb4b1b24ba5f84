// What the daemon's tests share: a folder of their own, and a hand that clicks.
#pragma once

#include "estimator/report.hpp"

#include <cstdlib>
#include <filesystem>
#include <stdexcept>
#include <string>

namespace sagitta::test {

/// A private folder, gone with the object.
class TempDir {
public:
    TempDir() {
        std::string pattern = (std::filesystem::temp_directory_path() / "sagitta-XXXXXX").string();
        if (mkdtemp(pattern.data()) == nullptr) {
            throw std::runtime_error("no temporary folder");
        }
        m_path = pattern;
    }
    TempDir(const TempDir&) = delete;
    TempDir& operator=(const TempDir&) = delete;
    ~TempDir() {
        std::error_code ignored;
        std::filesystem::remove_all(m_path, ignored);
    }
    [[nodiscard]] const std::filesystem::path& path() const { return m_path; }

private:
    std::filesystem::path m_path;
};

inline estimator::PointerTime at_ms(long long ms) {
    return estimator::PointerTime{std::chrono::milliseconds{ms}};
}

/// 400 ms of smooth motion over 300 counts to the right at 1000 reports/s (a minimum-jerk
/// profile), 50 ms of dwell, a click of 80 ms.
inline estimator::ReportBatch click_at(long long start_ms, estimator::PointerIndex pointer) {
    estimator::ReportBatch reports;
    int told = 0;
    for (int ms = 1; ms <= 400; ++ms) {
        const double s = ms / 400.0;
        const int x = static_cast<int>(300.0 * s * s * s * (10.0 - 15.0 * s + 6.0 * s * s) + 0.5);
        if (x != told) {
            estimator::Report report;
            report.time = at_ms(start_ms + ms);
            report.dx = x - told;
            report.pointer = pointer;
            reports.push_back(report);
            told = x;
        }
    }
    estimator::Report press;
    press.time = at_ms(start_ms + 450);
    press.pressed = static_cast<estimator::ButtonSet>(estimator::Button::left);
    press.pointer = pointer;
    reports.push_back(press);
    estimator::Report release = press;
    release.time = at_ms(start_ms + 530);
    release.pressed = 0;
    release.released = static_cast<estimator::ButtonSet>(estimator::Button::left);
    reports.push_back(release);
    return reports;
}

} // namespace sagitta::test
