#include "store/hour_blob.hpp"
#include "support.hpp"

#include <algorithm>
#include <doctest/doctest.h>

using namespace sagitta;
using namespace sagitta::store;
using namespace sagitta::store::test;
using doctest::Approx;
using estimator::HourSummary;
using estimator::Moments;
using estimator::PairMoments;

namespace {

constexpr double k_rounding = 1e-12; // sums in another order

void check_close(const Moments& a, const Moments& b) {
    CHECK(a.n == b.n);
    CHECK(a.mean == Approx(b.mean).epsilon(k_rounding));
    CHECK(a.m2 == Approx(b.m2).epsilon(k_rounding));
}

void check_close(const PairMoments& a, const PairMoments& b) {
    CHECK(a.n == b.n);
    CHECK(a.mean_x == Approx(b.mean_x).epsilon(k_rounding));
    CHECK(a.mean_y == Approx(b.mean_y).epsilon(k_rounding));
    CHECK(a.m2_x == Approx(b.m2_x).epsilon(k_rounding));
    CHECK(a.m2_y == Approx(b.m2_y).epsilon(k_rounding));
    CHECK(a.m_xy == Approx(b.m_xy).epsilon(k_rounding));
}

void check_close(const HourSummary& a, const HourSummary& b) {
    CHECK(a.outcomes == b.outcomes);
    CHECK(a.presses == b.presses);
    CHECK(a.wheel_120ths == b.wheel_120ths);
    CHECK(a.motion_reports == b.motion_reports);
    CHECK(a.active == b.active);
    CHECK(a.hand_travel.value() == Approx(b.hand_travel.value()).epsilon(k_rounding));
    CHECK(a.reference_width == b.reference_width);
    CHECK(a.clicks == b.clicks);
    CHECK(a.clicks_cpi_assumed == b.clicks_cpi_assumed);
    CHECK(a.movement_time == b.movement_time);
    for (std::size_t width = 0; width < a.difficulty_bits.size(); ++width) {
        CHECK(a.difficulty_bits[width] == Approx(b.difficulty_bits[width]).epsilon(k_rounding));
    }
    check_close(a.log_distance_time, b.log_distance_time);
    check_close(a.log_distance_error, b.log_distance_error);
    check_close(a.log_path_ratio, b.log_path_ratio);
    check_close(a.direction_changes, b.direction_changes);
    check_close(a.submovements, b.submovements);
    check_close(a.peak_speed_mm_s, b.peak_speed_mm_s);
    CHECK(a.distance_px.bins == b.distance_px.bins);
    CHECK(a.movement_time_ms.bins == b.movement_time_ms.bins);
    CHECK(a.error_centipx.bins == b.error_centipx.bins);
    for (std::size_t sector = 0; sector < estimator::k_sectors; ++sector) {
        check_close(a.sectors[sector].offset_share, b.sectors[sector].offset_share);
        check_close(a.sectors[sector].initial_angle_deg, b.sectors[sector].initial_angle_deg);
    }
}

/// Every field a different number, to catch a column in the wrong place.
HourSummary distinct_summary() {
    HourSummary summary;
    std::uint64_t next = 1;
    const auto count = [&next] { return next++; };
    const auto real = [&next] { return static_cast<double>(next++) + 1.0 / 3.0; };
    const auto moments = [&] { return Moments{count(), real(), real()}; };
    const auto pair = [&] { return PairMoments{count(), real(), real(), real(), real(), real()}; };
    std::generate(summary.outcomes.begin(), summary.outcomes.end(), count);
    summary.presses = count();
    summary.wheel_120ths = count();
    summary.motion_reports = count();
    summary.active = estimator::Micros{count()};
    summary.hand_travel = estimator::Millimetres::of(real());
    summary.reference_width = estimator::Pixels::of(real());
    summary.clicks = count();
    summary.clicks_cpi_assumed = count();
    summary.movement_time = estimator::Micros{count()};
    std::generate(summary.difficulty_bits.begin(), summary.difficulty_bits.end(), real);
    summary.log_distance_time = pair();
    summary.log_distance_error = pair();
    summary.log_path_ratio = moments();
    summary.direction_changes = moments();
    summary.submovements = moments();
    summary.peak_speed_mm_s = moments();
    for (auto* histogram :
         {&summary.distance_px, &summary.movement_time_ms, &summary.error_centipx}) {
        for (auto& bin : histogram->bins) {
            bin = static_cast<std::uint32_t>(count());
        }
    }
    for (auto& sector : summary.sectors) {
        sector = {moments(), moments()};
    }
    return summary;
}

} // namespace

TEST_CASE("every column of an hour reads back bit for bit") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto mouse = upright_mouse(store);
    const auto left = store.condition("left hand");
    REQUIRE(left);
    const auto summary = distinct_summary();
    Batch batch;
    batch.hours.push_back({k_monday, mouse, *left, summary});
    REQUIRE(store.append(batch));
    const auto rows = all_hours(store);
    REQUIRE(rows.size() == 1);
    CHECK(rows.front().start == k_monday);
    CHECK(rows.front().pointer == mouse);
    CHECK(rows.front().condition == *left);
    const auto& read = rows.front().summary;
    check_close(read, summary);
    CHECK(read.hand_travel == summary.hand_travel);
    CHECK(read.difficulty_bits == summary.difficulty_bits);
    CHECK(read.log_distance_time.m_xy == summary.log_distance_time.m_xy);
    CHECK(read.sectors[7].initial_angle_deg.m2 == summary.sectors[7].initial_angle_deg.m2);
}

TEST_CASE("hours merged over many batches equal the summary of one pass") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    std::vector<StoredHour> one_pass;
    {
        auto store = open_fresh(file).store;
        const auto movements = EverydayMovements{upright_mouse(store), k_monday}.take(1000);
        one_pass = hours_of(movements);
        for (std::size_t first = 0; first < movements.size(); first += 37) {
            const auto last = std::min(first + 37, movements.size());
            Batch batch;
            batch.hours = hours_of({movements.begin() + static_cast<std::ptrdiff_t>(first),
                                    movements.begin() + static_cast<std::ptrdiff_t>(last)});
            REQUIRE(store.append(batch));
        }
    }
    const auto opened = open_to_read(file);
    REQUIRE(opened);
    const auto rows = all_hours(opened->store);
    REQUIRE(rows.size() == one_pass.size());
    REQUIRE(rows.size() > 3);
    for (std::size_t i = 0; i < rows.size(); ++i) {
        CHECK(rows[i].start == one_pass[i].start);
        check_close(rows[i].summary, one_pass[i].summary);
    }
    CHECK(opened->store.last_hour().value() == one_pass.back().start);
}

TEST_CASE("hours of another pointer, condition or reference width stay apart") {
    const TempFolder folder;
    auto store = open_fresh(folder / "sagitta.db").store;
    const auto mouse = upright_mouse(store);
    const auto ball = thumb_trackball(store);
    const auto left = store.condition("left hand");
    REQUIRE(left);
    HourSummary summary;
    summary.presses = 1;
    HourSummary wider = summary;
    wider.reference_width = estimator::Pixels::of(40.0);
    Batch batch;
    batch.hours = {
        {k_monday, mouse, k_unlabelled, summary}, {k_monday, mouse, *left, summary},
        {k_monday, ball, k_unlabelled, summary},  {k_monday, mouse, k_unlabelled, wider},
        {k_monday, mouse, k_unlabelled, summary}, {k_monday + 1h, mouse, *left, summary}};
    REQUIRE(store.append(batch));
    CHECK(all_hours(store).size() == 5);
    REQUIRE(store.append(batch));
    const auto rows = all_hours(store);
    REQUIRE(rows.size() == 5);
    CHECK(rows[0].summary.presses == 4);
    CHECK(rows[1].summary.reference_width == wider.reference_width);
    CHECK(rows[1].summary.presses == 2);
    CHECK(rows[4].start == k_monday + 1h);

    std::uint64_t presses = 0;
    REQUIRE(store.for_each_hour({k_monday, k_monday + 1h, mouse},
                                [&](const StoredHour& hour) { presses += hour.summary.presses; }));
    CHECK(presses == 8);
}

TEST_CASE("a file without hours has no last hour") {
    const TempFolder folder;
    const auto store = open_fresh(folder / "sagitta.db").store;
    CHECK_FALSE(store.last_hour().value().has_value());
}

TEST_CASE("a histogram's bytes read back, and cut anywhere they are no histogram or a part of it") {
    estimator::LogHistogram histogram;
    histogram.bins[0] = 1;
    histogram.bins[63] = 300;
    histogram.bins[127] = 4'294'967'295U;
    const auto bytes = encode(histogram);
    const auto read = decode_histogram(bytes);
    REQUIRE(read);
    CHECK(read->bins == histogram.bins);
    for (std::size_t size = 0; size < bytes.size(); ++size) {
        const auto part = decode_histogram({bytes.data(), size});
        if (part) { // cut between two bins
            CHECK(part->bins[127] == 0);
        }
    }
    CHECK(encode(estimator::LogHistogram{}).size() == 1);
}

TEST_CASE("bytes that no histogram has are refused") {
    const auto decode = [](std::vector<int> values) {
        Bytes bytes;
        for (const int value : values) {
            bytes.push_back(static_cast<std::byte>(value));
        }
        return decode_histogram(bytes).has_value();
    };
    CHECK(decode({1, 127, 1}));
    CHECK_FALSE(decode({}));
    CHECK_FALSE(decode({2, 0, 1}));                            // another layout
    CHECK_FALSE(decode({1, 128, 1, 1}));                       // bin 128
    CHECK_FALSE(decode({1, 127, 1, 0, 1}));                    // a bin after the last
    CHECK_FALSE(decode({1, 0, 0x80, 0x80, 0x80, 0x80, 0x10})); // count above 32 bits
    CHECK_FALSE(decode({1, 0, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff}));
}

TEST_CASE("the sectors' bytes cut or lengthened anywhere are refused") {
    Sectors sectors{};
    sectors[0].offset_share = {300, -0.0125, 1e-3};
    sectors[5].initial_angle_deg = {1, 4.5, 0.0};
    auto bytes = encode(sectors);
    const auto read = decode_sectors(bytes);
    REQUIRE(read);
    CHECK((*read)[0].offset_share.mean == -0.0125);
    CHECK((*read)[5].initial_angle_deg.n == 1);
    CHECK((*read)[7].offset_share.n == 0);
    for (std::size_t size = 0; size < bytes.size(); ++size) {
        CHECK_FALSE(decode_sectors({bytes.data(), size}));
    }
    bytes.push_back(std::byte{0});
    CHECK_FALSE(decode_sectors(bytes));
}
