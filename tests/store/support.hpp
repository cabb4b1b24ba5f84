// What the tests of the store share: a folder of their own, rows with known values, a look at the
// file past the Store class.
#pragma once

#include "store/store.hpp"

#include <chrono>
#include <cstdint>
#include <filesystem>
#include <random>
#include <string>
#include <vector>

namespace sagitta::store::test {

using namespace std::chrono_literals;
using estimator::ErrorCode;

/// A folder that goes when the test ends.
class TempFolder {
public:
    TempFolder();
    TempFolder(const TempFolder&) = delete;
    TempFolder& operator=(const TempFolder&) = delete;
    ~TempFolder();
    [[nodiscard]] std::filesystem::path operator/(const std::string& name) const {
        return m_path / name;
    }
    [[nodiscard]] const std::filesystem::path& path() const { return m_path; }

private:
    std::filesystem::path m_path;
};

/// 2026-12-01T08:00:00Z: the start of an hour.
constexpr UtcTime k_monday{std::chrono::sys_days{std::chrono::year{2026} / 12 / 1} + 8h};

/// Opens to write; fails the test when that fails.
[[nodiscard]] Opened open_fresh(const std::filesystem::path& file);
[[nodiscard]] Result<Opened> open_to_read(const std::filesystem::path& file);

/// A pointer's row, of the archive's desk.
[[nodiscard]] PointerId upright_mouse(Store& store);
[[nodiscard]] PointerId thumb_trackball(Store& store);

/// Movements of everyday size: medians 194 px, 0.91 s, path ratio 1.14, ME 8.7 px; one about every
/// 12 s. Source of the medians: computed from open recordings of everyday work.
class EverydayMovements {
public:
    EverydayMovements(PointerId pointer, UtcTime start) : m_pointer{pointer}, m_time{start} {}
    [[nodiscard]] StoredMovement next();
    [[nodiscard]] std::vector<StoredMovement> take(std::size_t count);

private:
    double log_normal(double median, double sd_ln);
    PointerId m_pointer;
    UtcTime m_time;
    std::mt19937_64 m_random{20261201};
};

/// The hours of movements, one summary each.
[[nodiscard]] std::vector<StoredHour> hours_of(const std::vector<StoredMovement>& movements);
[[nodiscard]] Batch batch_of(std::vector<StoredMovement> movements);

[[nodiscard]] std::vector<StoredMovement> all_movements(const Store& store);
[[nodiscard]] std::vector<StoredHour> all_hours(const Store& store);

[[nodiscard]] std::string read_bytes(const std::filesystem::path& file);
void write_bytes(const std::filesystem::path& file, const std::string& bytes);
/// Names in the folder, sorted.
[[nodiscard]] std::vector<std::string> names_in(const std::filesystem::path& folder);

/// Runs SQL on the file past the Store; fails the test when that fails.
void run_sql(const std::filesystem::path& file, const std::string& sql);
/// First column of the first row as text.
[[nodiscard]] std::string ask_sql(const std::filesystem::path& file, const std::string& sql);

} // namespace sagitta::store::test
