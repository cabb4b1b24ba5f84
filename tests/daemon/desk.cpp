#include "desk.hpp"

#include <sqlite3.h>

namespace sagitta::test {

void Desk::meddle(const char* sql) const {
    sqlite3* database = nullptr;
    REQUIRE(sqlite3_open(store_file.c_str(), &database) == SQLITE_OK);
    CHECK(sqlite3_exec(database, sql, nullptr, nullptr, nullptr) == SQLITE_OK);
    sqlite3_close(database);
}

} // namespace sagitta::test
