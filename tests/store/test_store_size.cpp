#include "support.hpp"

#include <algorithm>
#include <doctest/doctest.h>

using namespace sagitta::store;
using namespace sagitta::store::test;

namespace {

constexpr std::size_t k_movements = 24'000;
constexpr std::size_t k_batch = 256;

/// Size of the closed file, hours and all else included, over its movements.
double bytes_per_movement(const std::filesystem::path& file, std::vector<StoredMovement> rows) {
    {
        auto store = open_fresh(file).store;
        static_cast<void>(upright_mouse(store));
        static_cast<void>(thumb_trackball(store));
        for (auto first = rows.begin(); first != rows.end();) {
            const auto last = first + std::min<std::ptrdiff_t>(k_batch, rows.end() - first);
            REQUIRE(store.append(batch_of({first, last})));
            first = last;
        }
    }
    return static_cast<double>(std::filesystem::file_size(file)) / static_cast<double>(rows.size());
}

} // namespace

TEST_CASE("a movement costs at most 100 bytes of the file, hours included") {
    const TempFolder folder;
    const double bytes = bytes_per_movement(
        folder / "sagitta.db", EverydayMovements{PointerId{1}, k_monday}.take(k_movements));
    MESSAGE("bytes a movement: " << bytes);
    CHECK(bytes <= 100.0);
}

TEST_CASE("a movement costs at most 100 bytes when two pointers' recordings are stored in turn") {
    const TempFolder folder;
    auto rows = EverydayMovements{PointerId{1}, k_monday}.take(k_movements / 2);
    const auto second = EverydayMovements{PointerId{2}, k_monday + 1s}.take(k_movements / 2);
    rows.insert(rows.end(), second.begin(), second.end());
    const double bytes = bytes_per_movement(folder / "sagitta.db", std::move(rows));
    MESSAGE("bytes a movement: " << bytes);
    CHECK(bytes <= 100.0);
}
