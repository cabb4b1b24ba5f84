#include "store/schema.hpp"
#include "support.hpp"

#include <cstdlib>
#include <doctest/doctest.h>
#include <optional>
#include <sys/stat.h>
#include <unistd.h>

using namespace sagitta;
using namespace sagitta::store;
using namespace sagitta::store::test;
namespace fs = std::filesystem;
using Names = std::vector<std::string>;

namespace {

mode_t mode_of(const fs::path& path) {
    struct stat info {};
    REQUIRE(stat(path.c_str(), &info) == 0);
    return info.st_mode & 07777;
}

/// Sets an environment variable for a scope.
class ScopedVariable {
public:
    ScopedVariable(const char* name, const char* value) : m_name{name} {
        if (const char* before = std::getenv(name)) {
            m_before = before;
        }
        value ? setenv(name, value, 1) : unsetenv(name);
    }
    ScopedVariable(const ScopedVariable&) = delete;
    ScopedVariable& operator=(const ScopedVariable&) = delete;
    ~ScopedVariable() { m_before ? setenv(m_name, m_before->c_str(), 1) : unsetenv(m_name); }

private:
    const char* m_name;
    std::optional<std::string> m_before;
};

void make_store(const fs::path& file, std::size_t movements) {
    auto store = open_fresh(file).store;
    REQUIRE(
        store.append(batch_of(EverydayMovements{upright_mouse(store), k_monday}.take(movements))));
}

ErrorCode code_of(const Result<Opened>& opened) {
    REQUIRE_FALSE(opened);
    CHECK(opened.error().message.find('\n') == std::string::npos);
    return opened.error().code;
}

} // namespace

TEST_CASE("a new file is readable by its owner only, and so are the folders made for it") {
    const TempFolder folder;
    const mode_t before = umask(0);
    const auto file = folder / "data/sagitta/sagitta.db";
    {
        auto store = open_fresh(file).store;
        REQUIRE(store.condition("left hand"));
        CHECK(mode_of(file.native() + "-wal") == 0600);
    }
    umask(before);
    CHECK(mode_of(file) == 0600);
    CHECK(mode_of(folder / "data") == 0700);
    CHECK(mode_of(folder / "data/sagitta") == 0700);
}

TEST_CASE("a folder that was there keeps its mode, and closing leaves the one file only") {
    const TempFolder folder;
    REQUIRE(chmod(folder.path().c_str(), 0755) == 0);
    make_store(folder / "sagitta.db", 10);
    CHECK(mode_of(folder.path()) == 0755);
    CHECK(names_in(folder.path()) == Names{"sagitta.db"});
}

TEST_CASE("the file is marked as ours, of version 1, with a write-ahead log") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 10);
    CHECK(ask_sql(file, "PRAGMA application_id") == "1396787028");
    CHECK(ask_sql(file, "PRAGMA user_version") == "1");
    CHECK(ask_sql(file, "PRAGMA journal_mode") == "wal");
    CHECK(ask_sql(file, "PRAGMA integrity_check") == "ok");
}

TEST_CASE("an empty file counts as new") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    write_bytes(file, "");
    const auto read = open_to_read(file);
    CHECK(code_of(read) == ErrorCode::not_found);
    CHECK_FALSE(open_fresh(file).set_aside);
    CHECK(mode_of(file) == 0600);
    CHECK(open_to_read(file));
}

TEST_CASE("reading a file that is not there says so and makes none") {
    const TempFolder folder;
    const auto read = open_to_read(folder / "none/sagitta.db");
    CHECK(code_of(read) == ErrorCode::not_found);
    CHECK(names_in(folder.path()).empty());
}

TEST_CASE("a folder in the file's place is refused") {
    const TempFolder folder;
    fs::create_directory(folder / "sagitta.db");
    CHECK(code_of(open_to_read(folder / "sagitta.db")) == ErrorCode::bad_format);
    const auto written = Store::open(folder / "sagitta.db", Mode::read_write, k_monday);
    CHECK(code_of(written) == ErrorCode::bad_format);
}

TEST_CASE("a file in a folder's place is refused") {
    const TempFolder folder;
    write_bytes(folder / "data", "text");
    const auto written = Store::open(folder / "data/sagitta.db", Mode::read_write, k_monday);
    CHECK(code_of(written) == ErrorCode::io);
    CHECK(read_bytes(folder / "data") == "text");
}

TEST_CASE("another program's SQLite file is refused untouched") {
    const TempFolder folder;
    const auto file = folder / "maps.db";
    run_sql(file, "CREATE TABLE sheet (name TEXT); INSERT INTO sheet VALUES ('county, 1:25000');");
    const auto marked = folder / "marked.db";
    run_sql(marked, "PRAGMA application_id = 77; CREATE TABLE movement (name TEXT);");
    for (const auto& foreign : {file, marked}) {
        const auto before = read_bytes(foreign);
        CHECK(code_of(Store::open(foreign, Mode::read_write, k_monday)) == ErrorCode::bad_format);
        CHECK(code_of(open_to_read(foreign)) == ErrorCode::bad_format);
        CHECK(read_bytes(foreign) == before);
    }
    CHECK(names_in(folder.path()) == Names{"maps.db", "marked.db"});
}

TEST_CASE("a file of a later version is refused untouched, and says which version it is") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 10);
    run_sql(file, "PRAGMA user_version = 12");
    const auto before = read_bytes(file);
    const auto written = Store::open(file, Mode::read_write, k_monday);
    CHECK(code_of(written) == ErrorCode::newer_version);
    CHECK(written.error().message.find("12") != std::string::npos);
    CHECK(code_of(open_to_read(file)) == ErrorCode::newer_version);
    CHECK(read_bytes(file) == before);
    CHECK(names_in(folder.path()) == Names{"sagitta.db"});
}

TEST_CASE("reading changes nothing and leaves no files") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 300);
    const auto before = read_bytes(file);
    {
        const auto opened = open_to_read(file);
        REQUIRE(opened);
        CHECK(all_movements(opened->store).size() == 300);
    }
    CHECK(read_bytes(file) == before);
    CHECK(names_in(folder.path()) == Names{"sagitta.db"});
}

TEST_CASE("a store opened to read refuses to write") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 3);
    auto opened = open_to_read(file);
    REQUIRE(opened);
    const auto labelled = opened->store.condition("left hand");
    REQUIRE_FALSE(labelled);
    CHECK(labelled.error().code == ErrorCode::no_permission);
}

TEST_CASE("a read-only file in a read-only folder can be read, not written, and nothing is made") {
    if (geteuid() == 0) {
        MESSAGE("skipped: permissions do not bind the superuser");
        return;
    }
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 300);
    for (const mode_t mode : {mode_t{0400}, mode_t{0600}}) {
        REQUIRE(chmod(file.c_str(), mode) == 0);
        REQUIRE(chmod(folder.path().c_str(), 0500) == 0);
        const auto opened = open_to_read(file);
        REQUIRE(opened);
        CHECK(all_movements(opened->store).size() == 300);
        CHECK(names_in(folder.path()) == Names{"sagitta.db"});
        CHECK(code_of(Store::open(file, Mode::read_write, k_monday)) == ErrorCode::no_permission);
        CHECK(names_in(folder.path()) == Names{"sagitta.db"});
        REQUIRE(chmod(folder.path().c_str(), 0700) == 0);
    }
}

TEST_CASE("a read-only file in a writable folder is not replaced") {
    if (geteuid() == 0) {
        MESSAGE("skipped: permissions do not bind the superuser");
        return;
    }
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 300);
    REQUIRE(chmod(file.c_str(), 0400) == 0);
    CHECK(code_of(Store::open(file, Mode::read_write, k_monday)) == ErrorCode::no_permission);
    CHECK(open_to_read(file));
    REQUIRE(chmod(file.c_str(), 0000) == 0);
    CHECK(code_of(open_to_read(file)) == ErrorCode::no_permission);
    CHECK(names_in(folder.path()) == Names{"sagitta.db"});
}

TEST_CASE("a file behind a symbolic link is opened where it is") {
    const TempFolder folder;
    make_store(folder / "real.db", 5);
    fs::create_symlink(folder / "real.db", folder / "link.db");
    CHECK(all_movements(open_fresh(folder / "link.db").store).size() == 5);
    auto bytes = read_bytes(folder / "real.db");
    write_bytes(folder / "real.db", bytes.substr(0, bytes.size() / 2));
    const auto opened = open_fresh(folder / "link.db");
    REQUIRE(opened.set_aside);
    CHECK(opened.set_aside->parent_path() == folder.path());
    CHECK(opened.set_aside->filename().native().rfind("real.db.damaged-", 0) == 0);
    CHECK(fs::is_symlink(folder / "link.db"));
}

TEST_CASE("the default file follows XDG_DATA_HOME, else HOME") {
    const ScopedVariable home{"HOME", "/home/someone"};
    {
        const ScopedVariable data{"XDG_DATA_HOME", "/data"};
        CHECK(default_file() == "/data/sagitta/sagitta.db");
    }
    for (const char* unusable : {static_cast<const char*>(nullptr), "", "relative/path"}) {
        const ScopedVariable data{"XDG_DATA_HOME", unusable};
        CHECK(default_file() == "/home/someone/.local/share/sagitta/sagitta.db");
    }
}

TEST_CASE("a file of an older version is brought forward step by step, keeping its rows") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 20);
    const auto add_column = [](Database& database) {
        return database.run("ALTER TABLE condition ADD COLUMN note TEXT NOT NULL DEFAULT 'none'");
    };
    const auto fill_column = [](Database& database) {
        return database.run("UPDATE condition SET note = 'filled'");
    };
    const std::vector<Migration> steps{migrations().front(), add_column, fill_column};
    {
        auto database = Database::open(file, Database::Access::write, 1s);
        REQUIRE(database);
        REQUIRE(migrate(*database, steps));
        REQUIRE(migrate(*database, steps)); // nothing left to do
    }
    CHECK(ask_sql(file, "PRAGMA user_version") == "3");
    CHECK(ask_sql(file, "SELECT note FROM condition") == "filled");
    CHECK(ask_sql(file, "SELECT count(*) FROM movement") == "20");
}

TEST_CASE("a migration that fails half way leaves the older version as it was") {
    const TempFolder folder;
    const auto file = folder / "sagitta.db";
    make_store(file, 20);
    const auto add_column = [](Database& database) {
        return database.run("ALTER TABLE condition ADD COLUMN note TEXT NOT NULL DEFAULT 'none'");
    };
    const auto break_off = [](Database&) -> Result<void> { return fail(ErrorCode::io, "no"); };
    const std::vector<Migration> steps{migrations().front(), add_column, break_off};
    {
        auto database = Database::open(file, Database::Access::write, 1s);
        REQUIRE(database);
        CHECK_FALSE(migrate(*database, steps));
    }
    CHECK(ask_sql(file, "PRAGMA user_version") == "1");
    CHECK(ask_sql(file, "SELECT count(*) FROM pragma_table_info('condition')") == "2");
    CHECK(open_to_read(file));
}
