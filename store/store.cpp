#include "store/store.hpp"

#include "store/connection.hpp"
#include "store/damage.hpp"
#include "store/schema.hpp"
#include "store/sqlite_error.hpp"

#include <array>
#include <cerrno>
#include <cstdlib>
#include <fcntl.h>
#include <pwd.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>
#include <utility>

namespace sagitta::store {

namespace fs = std::filesystem;

namespace {

/// Keeps other processes from making, examining or setting aside a file in the same folder while
/// this one does. Where the file system has no such locks, goes without.
class FolderLock {
public:
    explicit FolderLock(const fs::path& folder)
        : m_descriptor{::open(folder.c_str(), O_RDONLY | O_DIRECTORY | O_CLOEXEC)} {
        if (m_descriptor >= 0) {
            flock(m_descriptor, LOCK_EX);
        }
    }
    FolderLock(const FolderLock&) = delete;
    FolderLock& operator=(const FolderLock&) = delete;
    ~FolderLock() {
        if (m_descriptor >= 0) {
            ::close(m_descriptor); // releases the lock
        }
    }

private:
    int m_descriptor;
};

/// Absolute, and past any symbolic link, so that renaming moves the file and not a link to it.
fs::path resolve(const fs::path& file) {
    std::error_code error;
    auto real = fs::canonical(file, error);
    return error ? fs::absolute(file, error) : real;
}

Result<void> make_folders(const fs::path& folder) {
    struct stat info {};
    if (folder.empty() || stat(folder.c_str(), &info) == 0) {
        return {}; // what is there but no folder shows when the file is made
    }
    if (auto above = make_folders(folder.parent_path()); !above) {
        return above;
    }
    if (mkdir(folder.c_str(), 0700) != 0 && errno != EEXIST) {
        return tl::unexpected{system_error("make the folder", folder.native(), errno)};
    }
    return {};
}

/// An empty file is given the mode of a new one.
Result<void> make_file(const fs::path& file) {
    constexpr mode_t k_private = 0600;
    const int descriptor = ::open(file.c_str(), O_RDWR | O_CREAT | O_CLOEXEC, k_private);
    if (descriptor < 0 || fchmod(descriptor, k_private) != 0) {
        const int number = errno;
        if (descriptor >= 0) {
            ::close(descriptor);
        }
        return tl::unexpected{system_error("create", file.native(), number)};
    }
    ::close(descriptor);
    return {};
}

Result<Database> make_or_open(const fs::path& file, const OpenOptions& options) {
    const auto state = inspect(file);
    if (!state) {
        return tl::unexpected{state.error()};
    }
    if (*state != FileState::plausible) {
        if (auto made = make_file(file); !made) {
            return tl::unexpected{made.error()};
        }
    }
    return open_sound_file(file, Mode::read_write, options);
}

Result<Database> open_to_read(const fs::path& file, const OpenOptions& options) {
    const auto state = inspect(file);
    if (!state) {
        return tl::unexpected{state.error()};
    }
    if (*state != FileState::plausible) {
        return fail(ErrorCode::not_found,
                    file.native() +
                        (*state == FileState::missing ? " does not exist" : " is empty") +
                        ": nothing was recorded there yet; start sagittad, or name another file");
    }
    return open_sound_file(file, Mode::read_only, options);
}

Result<void> record_set_aside(Store& store, const fs::path& aside, UtcTime now) {
    Batch batch;
    batch.events.push_back({now, EventKind::set_aside, std::nullopt, aside.filename().native()});
    return store.append(batch);
}

std::unique_ptr<Store::Connection> connect(const fs::path& file, const struct stat& info,
                                           Database database) {
    return std::unique_ptr<Store::Connection>{new Store::Connection{.file = file,
                                                                    .device = info.st_dev,
                                                                    .inode = info.st_ino,
                                                                    .database = std::move(database),
                                                                    .insert_movement = {},
                                                                    .find_hour = {},
                                                                    .replace_hour = {},
                                                                    .insert_event = {}}};
}

} // namespace

Store::Store(std::unique_ptr<Connection> connection) : m_connection{std::move(connection)} {}
Store::Store(Store&&) noexcept = default;
Store& Store::operator=(Store&&) noexcept = default;
Store::~Store() = default;

const fs::path& Store::file() const {
    return m_connection->file;
}

Result<Opened> Store::open(const fs::path& file, Mode mode, UtcTime now,
                           const OpenOptions& options) {
    const bool writing = mode == Mode::read_write;
    const auto real = resolve(file);
    if (writing) {
        if (auto made = make_folders(real.parent_path()); !made) {
            return tl::unexpected{made.error()};
        }
    }
    std::optional<FolderLock> lock;
    if (writing) {
        lock.emplace(real.parent_path());
    }
    std::optional<fs::path> aside;
    auto database = writing ? make_or_open(real, options) : open_to_read(real, options);
    if (writing && !database && database.error().code == ErrorCode::damaged) {
        const auto moved = store::set_aside(real, now);
        if (!moved) {
            return tl::unexpected{moved.error()};
        }
        aside = *moved;
        database = make_or_open(real, options);
    }
    if (!database) {
        return tl::unexpected{database.error()};
    }
    struct stat info {};
    if (stat(real.c_str(), &info) != 0) {
        return tl::unexpected{system_error("open", real.native(), errno)};
    }
    Store store{connect(real, info, std::move(*database))};
    if (aside) {
        if (auto recorded = record_set_aside(store, *aside, now); !recorded) {
            return tl::unexpected{recorded.error()};
        }
    }
    return Opened{std::move(store), std::move(aside)};
}

Result<std::optional<fs::path>> Store::reopen(UtcTime now, const OpenOptions& options) {
    // Nobody may have a file open that is set aside. A database without tables, in memory, holds
    // the place meanwhile: everything asked of it fails.
    auto nothing = Database::open(":memory:", Database::Access::write, options.busy_timeout);
    if (!nothing) {
        return tl::unexpected{nothing.error()};
    }
    const fs::path file = m_connection->file;
    m_connection = connect(file, {}, std::move(*nothing));
    auto opened = open(file, Mode::read_write, now, options);
    if (!opened) {
        return tl::unexpected{opened.error()};
    }
    m_connection = std::move(opened->store.m_connection);
    return std::move(opened->set_aside);
}

std::filesystem::path default_file() {
    const char* const data = std::getenv("XDG_DATA_HOME");
    if (data && fs::path{data}.is_absolute()) {
        return fs::path{data} / "sagitta" / "sagitta.db";
    }
    const char* home = std::getenv("HOME");
    if (!home || !*home) {
        const passwd* const user = getpwuid(getuid());
        home = user ? user->pw_dir : "/";
    }
    return fs::path{home} / ".local" / "share" / "sagitta" / "sagitta.db";
}

} // namespace sagitta::store
