#include "fixtures.hpp"
#include "input/raw_writer.hpp"

#include <csignal>
#include <doctest/doctest.h>
#include <sys/resource.h>
#include <sys/stat.h>

using namespace sagitta;
using estimator::ErrorCode;
using estimator::Micros;
using estimator::PointerTime;
using estimator::Report;

namespace {
const estimator::ClockOffset k_clock{Micros{1'700'000'000'000'000}};
}

TEST_CASE("reports come back as they were written, with their time in UTC") {
    const tests::TempFolder folder;
    const auto file = folder.path() / "desk.raw";
    const estimator::ReportBatch reports{
        {.time = PointerTime{Micros{1'000}}, .dx = 3, .dy = -32767},
        {.time = PointerTime{Micros{2'000}}, .pressed = 0x81},
        {.time = PointerTime{Micros{3'000}}, .dx = -1, .released = 0x81, .after_loss = true},
        {.time = PointerTime{Micros{3'000}}, .dy = 2, .wheel_120ths = 65535},
        {.time = PointerTime{Micros{1'004'999}}, .wheel_120ths = 1, .pressed = 4, .released = 4}};
    auto writer = input::RawWriter::create(file);
    REQUIRE(writer);
    REQUIRE(writer->write(reports, k_clock));
    REQUIRE(writer->close());
    const auto drained = tests::drain(file);
    REQUIRE(drained);
    CHECK(drained->format == input::RecordingFormat::raw);
    CHECK(tests::as_text(drained->reports, PointerTime{k_clock.utc_minus_pointer}) ==
          tests::as_text(reports));
    REQUIRE(drained->remarks.size() == 1);
    CHECK(tests::any_contains(drained->remarks, "SYN_DROPPED"));
    REQUIRE(drained->pointers.size() == 1);
    CHECK(drained->pointers[0].name == "desk");
    CHECK(drained->pointers[0].origin == estimator::Origin::recording);
}

TEST_CASE("a recording is readable by its owner only, and an existing file is not overwritten") {
    const tests::TempFolder folder;
    const auto file = folder.path() / "desk.raw";
    auto writer = input::RawWriter::create(file);
    REQUIRE(writer);
    REQUIRE(writer->close());
    struct stat status {};
    REQUIRE(::stat(file.c_str(), &status) == 0);
    CHECK((status.st_mode & 0777) == 0600);
    const auto again = input::RawWriter::create(file);
    REQUIRE_FALSE(again);
    CHECK(again.error().code == ErrorCode::already_there);
    const auto nowhere = input::RawWriter::create(folder.path() / "none" / "desk.raw");
    REQUIRE_FALSE(nowhere);
    CHECK(nowhere.error().code == ErrorCode::not_found);
}

TEST_CASE("a writer that is dropped without close still writes what it was given") {
    const tests::TempFolder folder;
    const auto file = folder.path() / "desk.raw";
    {
        auto writer = input::RawWriter::create(file);
        REQUIRE(writer);
        REQUIRE(
            writer->write(std::vector<Report>{{.time = PointerTime{Micros{1}}, .dx = 3}}, k_clock));
    }
    CHECK(std::filesystem::file_size(file) == 2 * sizeof(input_event));
}

TEST_CASE("a full disk is told, and what was written before stays readable") {
    auto writer = input::RawWriter::create("/dev/full");
    CHECK_FALSE(writer); // it exists, and is never written over
    const tests::TempFolder folder;
    const auto file = folder.path() / "desk.raw";
    auto limited = input::RawWriter::create(file);
    REQUIRE(limited);
    std::vector<Report> reports(20'000, Report{.time = PointerTime{Micros{1}}, .dx = 3});
    // The kernel answers EFBIG beyond this size once the signal is ignored.
    rlimit before{};
    REQUIRE(::getrlimit(RLIMIT_FSIZE, &before) == 0);
    rlimit small = before;
    small.rlim_cur = 200'000;
    const auto handler = std::signal(SIGXFSZ, SIG_IGN);
    REQUIRE(::setrlimit(RLIMIT_FSIZE, &small) == 0);
    const auto written = limited->write(reports, k_clock);
    REQUIRE(::setrlimit(RLIMIT_FSIZE, &before) == 0);
    std::signal(SIGXFSZ, handler);
    REQUIRE_FALSE(written);
    CHECK(written.error().code == ErrorCode::no_space);
    CHECK_FALSE(limited->write(reports, k_clock));
    CHECK_FALSE(limited->close());
    const auto drained = tests::drain(file);
    REQUIRE(drained);
    CHECK(drained->reports.size() == 200'000 / (2 * sizeof(input_event)));
}
