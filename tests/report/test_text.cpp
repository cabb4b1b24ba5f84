#include "report/numbers.hpp"
#include "report/table.hpp"

#include <doctest/doctest.h>

using namespace sagitta;
using namespace sagitta::report;

TEST_CASE("a value is shown with the digits that the width of its interval warrants") {
    CHECK(signed_within(0.0488, 0.0691) == "+0.049");
    CHECK(signed_within(-23.4, 40.0) == "-23");
    CHECK(signed_within(-0.0001, 0.4) == "0.00");
}

TEST_CASE("a paragraph under a heading is indented on every line") {
    CHECK(under_heading("short") == "  short\n");
    const std::string text = under_heading(std::string(60, 'a') + " " + std::string(60, 'b'));
    CHECK(text == "  " + std::string(60, 'a') + "\n  " + std::string(60, 'b') + "\n");
}

TEST_CASE("an interval shows as many digits as its width warrants") {
    CHECK(with_interval({3.1512, 3.0312, 3.2712, 4}) == "3.15 ± 0.12");
    CHECK(with_interval({913.0, 880.0, 946.0, 4}) == "913 ± 33");
    CHECK(with_interval({913.0, 400.0, 1426.0, 4}) == "913 ± 513");
    CHECK(with_interval({1.14, 1.1388, 1.1412, 4}) == "1.140 ± 0.001");
    CHECK(with_interval({2.0, 2.0, 2.0, 4}) == "2.00 ± 0.00");
    CHECK(signed_interval({0.05, -0.08, 0.18, 7.2}) == "+0.05 ± 0.13");
    CHECK(signed_interval({-0.05, -0.18, 0.08, 7.2}) == "-0.05 ± 0.13");
    CHECK(signed_interval({-0.0001, -0.13, 0.13, 7.2}) == "0.00 ± 0.13");
}

TEST_CASE("counts, shares, durations and lengths read as people write them") {
    CHECK(grouped(7) == "7");
    CHECK(grouped(4812) == "4 812");
    CHECK(grouped(1234567) == "1 234 567");
    CHECK(count_of(1, "day") == "1 day");
    CHECK(count_of(0, "day") == "0 days");
    CHECK(count_of(2, "button press") == "2 button presses");
    CHECK(share(0, 10) == "0 %");
    CHECK(share(1, 3) == "33 %");
    CHECK(share(4, 1000) == "0.4 %");
    CHECK(share(1, 100000) == "< 0.1 %");
    CHECK(duration_text(std::chrono::seconds{40}) == "40 s");
    CHECK(duration_text(std::chrono::minutes{312}) == "5 h 12 min");
    CHECK(duration_text(std::chrono::seconds{3599}) == "1 h 0 min");
    CHECK(length_text(estimator::Millimetres::of(4200.0)) == "4.2 m");
    CHECK(length_text(estimator::Millimetres::of(318'400.0)) == "318 m");
    CHECK(length_text(estimator::Millimetres::of(1'240'000.0)) == "1.24 km");
}

TEST_CASE("a table aligns by what is seen and leaves out empty columns") {
    Table table{
        {{"", Align::left}, {"mean", Align::right}, {"none", Align::left}, {"", Align::left}}};
    table.add({"a", "3 ± 1", "", "px"});
    table.add({"longer", "12 ± 10"});
    CHECK(table.text() == "             mean\n"
                          "  a         3 ± 1  px\n"
                          "  longer  12 ± 10\n");
}

TEST_CASE("a name cannot steer the terminal") {
    CHECK(printable("Mouse \x1b[2J") == "Mouse ?[2J");
    CHECK(printable("a\nb\x7f") == "a?b?");
    CHECK(printable("\xc2\x9b"
                    "31m") == "?31m");
    CHECK(printable("bad \xff\xfe end\xe2\x82") == "bad ?? end??");
    CHECK(printable("Zürich ± µ") == "Zürich ± µ");
}

TEST_CASE("long text is shortened and wrapped by places, not bytes") {
    CHECK(shortened("Zürich", 6) == "Zürich");
    CHECK(shortened("Zürich Maus", 7) == "Zürich…");
    CHECK(wrapped("one two three", 7) == "one two\nthree\n");
    CHECK(wrapped("", 7).empty());
}
