#include "store/damage.hpp"

#include "store/schema.hpp"
#include "store/sqlite_error.hpp"

#include <algorithm>
#include <array>
#include <cerrno>
#include <cstdio>
#include <cstring>
#include <fcntl.h>
#include <sys/stat.h>
#include <unistd.h>

namespace sagitta::store {

namespace fs = std::filesystem;

namespace {

constexpr std::array k_side_files{"-wal", "-shm", "-journal"};

/// The first 100 bytes of a SQLite file. Source: https://www.sqlite.org/fileformat2.html, 1.3.
using Header = std::array<unsigned char, 100>;
constexpr std::string_view k_magic{"SQLite format 3\0", 16};

std::uint64_t big_endian(const Header& header, std::size_t offset, std::size_t size) {
    std::uint64_t value = 0;
    for (std::size_t i = 0; i < size; ++i) {
        value = value << 8U | header[offset + i];
    }
    return value;
}

std::uint64_t page_size(const Header& header) {
    const auto stored = big_endian(header, 16, 2);
    return stored == 1 ? 65536 : stored;
}

/// A log or journal may hold pages that the file itself lacks until SQLite has merged it.
bool has_pending_writes(const fs::path& file) {
    const auto holds_bytes = [&file](const char* suffix) {
        struct stat side {};
        return stat((file.native() + suffix).c_str(), &side) == 0 && side.st_size > 0;
    };
    return holds_bytes("-wal") || holds_bytes("-journal");
}

Error foreign(const fs::path& file) {
    return {ErrorCode::bad_format, file.native() + " is another program's SQLite file, left as it "
                                                   "is: name another file for the store"};
}

Error newer(const fs::path& file, std::int64_t version) {
    return {ErrorCode::newer_version,
            file.native() + " was written by a later version of this program (file version " +
                std::to_string(version) + ", known up to " + std::to_string(current_version()) +
                "), left as it is: install that version, or name another file"};
}

Result<FileState> judge(const fs::path& file, std::uint64_t size, const Header& header) {
    if (size < header.size() || std::memcmp(header.data(), k_magic.data(), k_magic.size()) != 0) {
        return tl::unexpected{damaged_error(file.native(), "its header is broken")};
    }
    if (has_pending_writes(file)) {
        return FileState::plausible;
    }
    const auto application = static_cast<std::int64_t>(big_endian(header, 68, 4));
    const auto version = static_cast<std::int64_t>(big_endian(header, 60, 4));
    if (application == k_application_id && version > current_version()) {
        return tl::unexpected{newer(file, version)};
    }
    const auto pages = big_endian(header, 28, 4);
    if (application == k_application_id && size < pages * page_size(header)) {
        return tl::unexpected{damaged_error(file.native(), "its end is missing")};
    }
    return FileState::plausible;
}

Result<void> check_text(Database& database, const fs::path& file, std::string_view sql) {
    const auto answer = database.text(sql);
    if (!answer) {
        return tl::unexpected{answer.error()};
    }
    if (*answer != "ok") {
        auto why = *answer;
        std::replace(why.begin(), why.end(), '\n', ' ');
        return tl::unexpected{damaged_error(file.native(), why)};
    }
    return {};
}

/// Writing touches the last movements and any page of the small tables.
Result<void> examine_recorded(Database& database, const fs::path& file) {
    for (const char* sql : {"PRAGMA quick_check(pointer)", "PRAGMA quick_check(condition)",
                            "PRAGMA quick_check(hour)", "PRAGMA quick_check(event)"}) {
        if (auto sound = check_text(database, file, sql); !sound) {
            return sound;
        }
    }
    return database.integer("SELECT flags FROM movement ORDER BY press_us DESC, pointer DESC")
        .map([](const auto&) {});
}

std::string dated_suffix(UtcTime now) {
    const auto second = std::chrono::floor<std::chrono::seconds>(now);
    const auto day = std::chrono::floor<std::chrono::days>(second);
    const std::chrono::year_month_day date{day};
    const std::chrono::hh_mm_ss time{second - day};
    std::array<char, 64> text{};
    std::snprintf(text.data(), text.size(), ".damaged-%04d-%02u-%02uT%02d%02d%02dZ",
                  static_cast<int>(date.year()), static_cast<unsigned>(date.month()),
                  static_cast<unsigned>(date.day()), static_cast<int>(time.hours().count()),
                  static_cast<int>(time.minutes().count()),
                  static_cast<int>(time.seconds().count()));
    return text.data();
}

/// Like rename(2), but fails with EEXIST instead of replacing `to`.
int rename_without_replacing(const fs::path& from, const fs::path& to) {
    if (renameat2(AT_FDCWD, from.c_str(), AT_FDCWD, to.c_str(), RENAME_NOREPLACE) == 0) {
        return 0;
    }
    if (errno != EINVAL && errno != ENOSYS) {
        return errno;
    }
    struct stat taken {}; // a file system that cannot do it in one step
    if (lstat(to.c_str(), &taken) == 0) {
        return EEXIST;
    }
    return std::rename(from.c_str(), to.c_str()) == 0 ? 0 : errno;
}

} // namespace

Result<FileState> inspect(const fs::path& file) {
    struct stat info {};
    if (stat(file.c_str(), &info) != 0) {
        if (errno == ENOENT) {
            return FileState::missing;
        }
        return tl::unexpected{system_error("open", file.native(), errno)};
    }
    if (!S_ISREG(info.st_mode)) {
        return fail(ErrorCode::bad_format,
                    file.native() + " is not a regular file: name the store's file");
    }
    if (info.st_size == 0) {
        return FileState::empty;
    }
    const int descriptor = ::open(file.c_str(), O_RDONLY | O_CLOEXEC);
    if (descriptor < 0) {
        return tl::unexpected{system_error("open", file.native(), errno)};
    }
    Header header{};
    const auto got = pread(descriptor, header.data(), header.size(), 0);
    const int number = errno;
    ::close(descriptor);
    if (got < 0) {
        return tl::unexpected{system_error("read", file.native(), number)};
    }
    return judge(file, static_cast<std::uint64_t>(info.st_size), header);
}

Result<void> examine(Database& database, const fs::path& file, Depth depth) {
    const auto application = database.integer("PRAGMA application_id");
    const auto version = database.integer("PRAGMA user_version");
    const auto tables = database.integer("SELECT count(*) FROM sqlite_schema WHERE name IN "
                                         "('pointer', 'condition', 'movement', 'hour', 'event')");
    if (!application || !version || !tables) {
        return tl::unexpected{(!application ? application.error()
                               : !version   ? version.error()
                                            : tables.error())};
    }
    constexpr std::int64_t k_tables = 5;
    if (*application != k_application_id) {
        return tl::unexpected{*tables == k_tables
                                  ? damaged_error(file.native(), "its application mark is wrong")
                                  : foreign(file)};
    }
    if (version->value_or(0) > current_version()) {
        return tl::unexpected{newer(file, version->value_or(0))};
    }
    if (*tables != k_tables || version->value_or(0) < 1) {
        return tl::unexpected{damaged_error(file.native(), "its tables or its version are gone")};
    }
    switch (depth) {
    case Depth::schema:
        return {};
    case Depth::recorded:
        return examine_recorded(database, file);
    case Depth::whole:
        return check_text(database, file, "PRAGMA quick_check(1)");
    }
    return {};
}

Result<fs::path> set_aside(const fs::path& file, UtcTime now) {
    const std::string dated = file.native() + dated_suffix(now);
    std::string name = dated;
    int number = rename_without_replacing(file, name);
    for (int copy = 2; number == EEXIST; ++copy) {
        name = dated + "-" + std::to_string(copy);
        number = rename_without_replacing(file, name);
    }
    if (number != 0) {
        return tl::unexpected{system_error("set aside the damaged", file.native(), number)};
    }
    for (const char* suffix : k_side_files) {
        number = rename_without_replacing(file.native() + suffix, name + suffix);
        if (number != 0 && number != ENOENT) {
            return tl::unexpected{system_error("set aside", file.native() + suffix, number)};
        }
    }
    return fs::path{name};
}

} // namespace sagitta::store
