#include "config/nearest.hpp"

#include <doctest/doctest.h>
#include <vector>

namespace sagitta::config {

TEST_CASE("the edit distance counts insertions, deletions, replacements and swaps") {
    CHECK(edit_distance("", "") == 0);
    CHECK(edit_distance("", "abc") == 3);
    CHECK(edit_distance("abc", "") == 3);
    CHECK(edit_distance("rest", "rest") == 0);
    CHECK(edit_distance("rest", "rests") == 1);
    CHECK(edit_distance("rest", "rst") == 1);
    CHECK(edit_distance("rest", "best") == 1);
    CHECK(edit_distance("rest", "rset") == 1);
    // Source: the usual example of textbooks, common practice, no source.
    CHECK(edit_distance("kitten", "sitting") == 3);
    // A swapped pair is not edited again in this form of the distance; from memory.
    CHECK(edit_distance("ca", "abc") == 3);
}

TEST_CASE("the nearest word is the one with the fewest edits, the first of equals") {
    const std::vector<std::string> words{"repeat_ms", "repeat_px", "rest_ms"};
    CHECK(nearest("repeat_mx", words) == "repeat_ms");
    CHECK(nearest("repeat_x", words) == "repeat_px");
    CHECK(nearest("rest", words) == "rest_ms");
}

TEST_CASE("a word of which more than a third is wrong has no nearest") {
    const std::vector<std::string> words{"rest_ms", "log"};
    CHECK_FALSE(nearest("colour", words).has_value());
    CHECK_FALSE(nearest("", words).has_value());
    CHECK_FALSE(nearest("lot_of", words).has_value());
    CHECK(nearest("lot", words) == "log");
    CHECK_FALSE(nearest(std::string(100'000, 'x'), words).has_value());
}

} // namespace sagitta::config
