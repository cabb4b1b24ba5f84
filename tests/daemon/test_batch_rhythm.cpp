#include "daemon/batch_rhythm.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using daemon::BatchRhythm;
using estimator::Micros;

namespace {

/// Reports of `counts` each, `interval` apart.
estimator::ReportBatch steady(Micros interval, int counts, int reports, Micros start = Micros{0}) {
    estimator::ReportBatch batch;
    for (int i = 0; i < reports; ++i) {
        estimator::Report report;
        report.time = estimator::PointerTime{start + i * interval};
        report.dx = counts;
        batch.push_back(report);
    }
    return batch;
}

} // namespace

TEST_CASE("a pointer of unknown rate is read often enough for 8000 reports a second") {
    const BatchRhythm rhythm;
    CHECK(rhythm.period() == Micros{2000});
    // 16 packets of 4 events fill half of the kernel's 128.
    CHECK(rhythm.period() / Micros{125} * 4 == 64);
}

TEST_CASE("a pointer of known rate may fill half the kernel's buffer between readings") {
    for (const auto& [interval, period] :
         {std::pair{Micros{125}, Micros{2000}}, std::pair{Micros{500}, Micros{8000}},
          std::pair{Micros{1000}, Micros{16000}}}) {
        BatchRhythm rhythm;
        rhythm.learn(steady(interval, 5, 50));
        REQUIRE(rhythm.report_interval() == interval);
        CHECK(rhythm.period() == period);
    }
}

TEST_CASE("a slow pointer is read at least every 32 ms") {
    BatchRhythm rhythm;
    rhythm.learn(steady(Micros{8000}, 5, 50));
    CHECK(rhythm.period() == Micros{32000});
}

TEST_CASE("a slow hand does not make a fast pointer look slow") {
    BatchRhythm rhythm;
    rhythm.learn(steady(Micros{20000}, 1, 500)); // one count now and then
    CHECK_FALSE(rhythm.report_interval());
    CHECK(rhythm.period() == daemon::k_shortest_period);
}

TEST_CASE("the rate is learnt across batches of any size") {
    BatchRhythm rhythm;
    for (const auto& report : steady(Micros{1000}, 3, 9)) {
        rhythm.learn({&report, 1});
    }
    CHECK(rhythm.report_interval() == Micros{1000});
}

TEST_CASE("a burst of late reports is forgotten while the pointer moves on") {
    BatchRhythm rhythm;
    rhythm.learn(steady(Micros{1000}, 3, 100));
    rhythm.learn(steady(Micros{10}, 3, 9, Micros{200'000}));
    CHECK(rhythm.period() == daemon::k_shortest_period);
    rhythm.learn(steady(Micros{1000}, 3, 1000, Micros{300'000}));
    CHECK(rhythm.period() > Micros{15000});
    CHECK(rhythm.period() <= Micros{16000});
}

TEST_CASE("an overrun sends the rhythm back to its most careful") {
    BatchRhythm rhythm;
    rhythm.learn(steady(Micros{1000}, 3, 100));
    estimator::Report lossy;
    lossy.time = estimator::PointerTime{Micros{200'000}};
    lossy.dx = 3;
    lossy.after_loss = true;
    rhythm.learn({&lossy, 1});
    CHECK(rhythm.period() == daemon::k_shortest_period);
}
