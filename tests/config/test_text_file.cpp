// Paths that are not a readable text file, and content that is not text.
#include "config/text_file.hpp"
#include "tests/config/helpers.hpp"

#include <sys/stat.h>
#include <unistd.h>

namespace sagitta::config {
namespace {

using estimator::ErrorCode;

estimator::Error error_of(const std::filesystem::path& file) {
    const auto settings = read_settings(file);
    REQUIRE_FALSE(settings.has_value());
    return settings.error();
}

} // namespace

TEST_CASE("a file that is not there is refused") {
    const TempFolder folder;
    const auto file = folder.path() / "sagitta.yaml";
    CHECK(error_of(file).code == ErrorCode::not_found);
    CHECK(error_of(file).message == file.string() + ": there is no such file");
    const auto below_a_file = folder.write("plain", "") / "sagitta.yaml";
    CHECK(error_of(below_a_file).code == ErrorCode::not_found);
}

TEST_CASE("a folder is refused") {
    const TempFolder folder;
    const auto error = error_of(folder.path());
    CHECK(error.code == ErrorCode::bad_format);
    CHECK(error.message == folder.path().string() + ": is a folder, but must be a text file");
}

TEST_CASE("a named pipe without a writer is refused at once") {
    const TempFolder folder;
    const auto file = folder.path() / "pipe";
    REQUIRE(::mkfifo(file.c_str(), 0600) == 0);
    const auto error = error_of(file);
    CHECK(error.code == ErrorCode::bad_format);
    CHECK(error.message == file.string() + ": is a named pipe, but must be a text file");
}

TEST_CASE("a device is refused without being read") {
    CHECK(error_of("/dev/zero").message == "/dev/zero: is a device, but must be a text file");
    CHECK(error_of("/dev/null").code == ErrorCode::bad_format);
}

TEST_CASE("a link that leads to itself is refused with the system's reason") {
    const TempFolder folder;
    const auto file = folder.path() / "loop";
    std::filesystem::create_symlink(file, file);
    CHECK(error_of(file).code == ErrorCode::io);
    CHECK(error_of(file).message ==
          file.string() + ": cannot be read: Too many levels of symbolic links");
}

TEST_CASE("a file without read permission is refused") {
    const TempFolder folder;
    const auto file = folder.write("sagitta.yaml", "");
    REQUIRE(::chmod(file.c_str(), 0000) == 0);
    // The superuser may read everything, so it steps down for this test.
    const bool is_superuser = ::geteuid() == 0;
    constexpr uid_t k_nobody = 65534;
    REQUIRE((!is_superuser || ::seteuid(k_nobody) == 0));
    const auto settings = read_settings(file);
    REQUIRE((!is_superuser || ::seteuid(0) == 0));
    REQUIRE_FALSE(settings.has_value());
    CHECK(settings.error().code == ErrorCode::no_permission);
    CHECK(settings.error().message ==
          file.string() + ": may not be read by this user; see its permissions with ls -l");
}

TEST_CASE("a file above 1 MiB is refused and one of exactly 1 MiB is read") {
    const TempFolder folder;
    std::string text(k_max_text_bytes, '#');
    CHECK(read_settings(folder.write("full", text)).has_value());
    const auto file = folder.write("over", text + "#");
    CHECK(error_of(file).code == ErrorCode::bad_format);
    CHECK(error_of(file).message ==
          file.string() + ": is larger than 1 MiB, the most this file may hold");
}

TEST_CASE("bytes that are not UTF-8 are refused with their place") {
    CHECK(message_of("log:\n  level: inf\xE9\n") ==
          "sagitta.yaml:2:13: byte 0xE9 is not UTF-8; save the file in that encoding");
    CHECK(message_of("# \xC3\xA9\xC3\xA9 \xFF") ==
          "sagitta.yaml:1:6: byte 0xFF is not UTF-8; save the file in that encoding");
    CHECK(refusal_of("\xFF\xFE").code == ErrorCode::bad_format);
}

TEST_CASE("every malformed form of UTF-8 is refused and every edge of the right ones is read") {
    // Overlong, surrogate, beyond U+10FFFF, a lone continuation, cut at each byte.
    // Source: RFC 3629, section 4.
    for (const char* wrong : {"\xC0\x80", "\xC1\xBF", "\xE0\x9F\xBF", "\xED\xA0\x80",
                              "\xF0\x8F\xBF\xBF", "\xF4\x90\x80\x80", "\xF5\x80\x80\x80", "\x80",
                              "\xC3", "\xE2\x82", "\xE2", "\xF0\x9F\x98", "\xC3\x28", "\xFE"}) {
        CAPTURE(wrong);
        CHECK_FALSE(check_text(wrong, "f").has_value());
    }
    for (const char* right :
         {"\x7E", "\xC2\x80", "\xDF\xBF", "\xE0\xA0\x80", "\xED\x9F\xBF", "\xEE\x80\x80",
          "\xEF\xBF\xBF", "\xF0\x90\x80\x80", "\xF4\x8F\xBF\xBF", "\t\r\n"}) {
        CAPTURE(right);
        CHECK(check_text(right, "f").has_value());
    }
}

TEST_CASE("NUL and other control characters are refused with their place") {
    using namespace std::string_view_literals;
    CHECK(message_of("log:\n\0"sv) ==
          "sagitta.yaml:2:1: control character 0x00 does not belong in a text file");
    CHECK(message_of("# \x1B[31m") ==
          "sagitta.yaml:1:3: control character 0x1B does not belong in a text file");
    CHECK(message_of("#\x7F") ==
          "sagitta.yaml:1:2: control character 0x7F does not belong in a text file");
}

TEST_CASE("a byte order mark and Windows line ends do no harm") {
    CHECK(settings_in("\xEF\xBB\xBFlog:\r\n  level: debug\r\n").log_level == "debug");
    CHECK(message_of("\xEF\xBB\xBFlog:\r\n  level: loud\r\n") ==
          "sagitta.yaml:2:10: log.level is 'loud', but must be debug, info, warning or error");
}

TEST_CASE("places count lines and characters from 1") {
    const std::string_view text = "ab\n\xC3\xA9\xC3\xA9x\n";
    CHECK(place("f", position_of(text, 0)) == "f:1:1");
    CHECK(place("f", position_of(text, 2)) == "f:1:3");
    CHECK(place("f", position_of(text, 3)) == "f:2:1");
    CHECK(place("f", position_of(text, 7)) == "f:2:3");
    CHECK(place("f", position_of(text, text.size())) == "f:3:1");
}

} // namespace sagitta::config
