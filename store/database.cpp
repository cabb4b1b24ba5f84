#include "store/database.hpp"

#include "store/sqlite_error.hpp"

#include <limits>
#include <sqlite3.h>
#include <utility>

namespace sagitta::store {

namespace {

/// The file as a URI, for the options that SQLite takes only there.
std::string immutable_uri(const std::filesystem::path& file) {
    static constexpr char k_hex[] = "0123456789ABCDEF";
    std::string uri = "file:";
    for (const char c : file.native()) {
        if (c == '%' || c == '?' || c == '#') {
            const auto byte = static_cast<unsigned char>(c);
            uri += {'%', k_hex[byte >> 4U], k_hex[byte & 15U]};
        } else {
            uri += c;
        }
    }
    return uri + "?immutable=1";
}

} // namespace

void Statement::Finalize::operator()(sqlite3_stmt* statement) const noexcept {
    sqlite3_finalize(statement);
}

void Statement::bind_integer(std::int64_t value) {
    m_bind_code |= sqlite3_bind_int64(m_statement.get(), ++m_bound, value);
}

void Statement::bind_integer(std::optional<std::int64_t> value) {
    value ? bind_integer(*value) : bind_null();
}

void Statement::bind_real(double value) {
    m_bind_code |= sqlite3_bind_double(m_statement.get(), ++m_bound, value);
}

void Statement::bind_text(std::string_view value) {
    m_bind_code |= sqlite3_bind_text64(m_statement.get(), ++m_bound, value.data(), value.size(),
                                       SQLITE_TRANSIENT, SQLITE_UTF8);
}

void Statement::bind_blob(std::span<const std::byte> value) {
    m_bind_code |= sqlite3_bind_blob64(m_statement.get(), ++m_bound, value.data(), value.size(),
                                       SQLITE_TRANSIENT);
}

void Statement::bind_null() {
    m_bind_code |= sqlite3_bind_null(m_statement.get(), ++m_bound);
}

Result<bool> Statement::step() {
    const int code = m_bind_code == SQLITE_OK ? sqlite3_step(m_statement.get()) : m_bind_code;
    if (code == SQLITE_ROW || code == SQLITE_DONE) {
        return code == SQLITE_ROW;
    }
    sqlite3* const database = sqlite3_db_handle(m_statement.get());
    if (code == SQLITE_CONSTRAINT_PRIMARYKEY || code == SQLITE_CONSTRAINT_UNIQUE) {
        return fail(ErrorCode::already_there, sqlite3_errmsg(database));
    }
    return tl::unexpected{error_of(database, code)};
}

void Statement::reset() noexcept {
    sqlite3_reset(m_statement.get());
    m_bound = 0;
    m_bind_code = SQLITE_OK;
}

bool Statement::is_null(int column) const noexcept {
    return sqlite3_column_type(m_statement.get(), column) == SQLITE_NULL;
}

std::int64_t Statement::integer(int column) const noexcept {
    return sqlite3_column_int64(m_statement.get(), column);
}

double Statement::real(int column) const noexcept {
    return is_null(column) ? std::numeric_limits<double>::quiet_NaN()
                           : sqlite3_column_double(m_statement.get(), column);
}

std::string_view Statement::text(int column) const noexcept {
    const auto* const data = sqlite3_column_text(m_statement.get(), column);
    const int size = sqlite3_column_bytes(m_statement.get(), column);
    return data ? std::string_view{reinterpret_cast<const char*>(data),
                                   static_cast<std::size_t>(size)}
                : std::string_view{};
}

std::span<const std::byte> Statement::blob(int column) const noexcept {
    const void* const data = sqlite3_column_blob(m_statement.get(), column);
    const int size = sqlite3_column_bytes(m_statement.get(), column);
    return data ? std::span{static_cast<const std::byte*>(data), static_cast<std::size_t>(size)}
                : std::span<const std::byte>{};
}

void Database::Close::operator()(sqlite3* database) const noexcept {
    sqlite3_close_v2(database);
}

Result<Database> Database::open(const std::filesystem::path& file, Access access,
                                std::chrono::milliseconds busy_timeout) {
    const bool immutable = access == Access::immutable;
    const std::string name = immutable ? immutable_uri(file) : file.native();
    const int flags = SQLITE_OPEN_NOMUTEX | SQLITE_OPEN_EXRESCODE |
                      (immutable ? SQLITE_OPEN_READONLY | SQLITE_OPEN_URI : SQLITE_OPEN_READWRITE);
    sqlite3* raw = nullptr;
    const int code = sqlite3_open_v2(name.c_str(), &raw, flags, nullptr);
    Database database{raw};
    if (code != SQLITE_OK) {
        return tl::unexpected{error_of(raw, code)};
    }
    sqlite3_busy_timeout(raw, static_cast<int>(busy_timeout.count()));
    // The file may be broken or made by somebody else: trust nothing in its schema.
    sqlite3_db_config(raw, SQLITE_DBCONFIG_DEFENSIVE, 1, nullptr);
    sqlite3_db_config(raw, SQLITE_DBCONFIG_TRUSTED_SCHEMA, 0, nullptr);
    // The first statement reads the schema; prepare() tells a broken one.
    if (const auto schema = database.prepare("SELECT 1 FROM sqlite_schema"); !schema) {
        return tl::unexpected{schema.error()};
    }
    auto set = database.run("PRAGMA cell_size_check = ON; PRAGMA cache_size = -1024;");
    if (set && access != Access::write) {
        set = database.run("PRAGMA query_only = ON;");
    }
    if (!set) {
        return tl::unexpected{set.error()};
    }
    return database;
}

Result<void> Database::run(const char* sql) {
    const int code = sqlite3_exec(m_database.get(), sql, nullptr, nullptr, nullptr);
    if (code != SQLITE_OK) {
        return tl::unexpected{error_of(m_database.get(), code)};
    }
    return {};
}

Result<Statement> Database::prepare(std::string_view sql) {
    sqlite3_stmt* raw = nullptr;
    const int code = sqlite3_prepare_v2(m_database.get(), sql.data(), static_cast<int>(sql.size()),
                                        &raw, nullptr);
    Statement statement{raw};
    if (code == SQLITE_ERROR) { // our statements are right, so the tables are not ours any more
        return tl::unexpected{damaged_error(sqlite3_db_filename(m_database.get(), "main"),
                                            sqlite3_errmsg(m_database.get()))};
    }
    if (code != SQLITE_OK) {
        return tl::unexpected{error_of(m_database.get(), code)};
    }
    return statement;
}

Result<std::optional<std::int64_t>> Database::integer(std::string_view sql) {
    auto statement = prepare(sql);
    if (!statement) {
        return tl::unexpected{statement.error()};
    }
    const auto row = statement->step();
    if (!row) {
        return tl::unexpected{row.error()};
    }
    if (!*row || statement->is_null(0)) {
        return std::optional<std::int64_t>{};
    }
    return std::optional{statement->integer(0)};
}

Result<std::string> Database::text(std::string_view sql) {
    auto statement = prepare(sql);
    if (!statement) {
        return tl::unexpected{statement.error()};
    }
    const auto row = statement->step();
    if (!row) {
        return tl::unexpected{row.error()};
    }
    return *row ? std::string{statement->text(0)} : std::string{};
}

bool Database::is_read_only() const noexcept {
    return sqlite3_db_readonly(m_database.get(), "main") == 1;
}

bool Database::in_transaction() const noexcept {
    return sqlite3_get_autocommit(m_database.get()) == 0;
}

std::int64_t Database::changed_rows() const noexcept {
    return sqlite3_changes64(m_database.get());
}

std::int64_t Database::last_row_id() const noexcept {
    return sqlite3_last_insert_rowid(m_database.get());
}

Result<Transaction> Transaction::begin(Database& database) {
    if (auto begun = database.run("BEGIN IMMEDIATE"); !begun) {
        return tl::unexpected{begun.error()};
    }
    return Transaction{database};
}

Transaction::Transaction(Transaction&& other) noexcept
    : m_database{std::exchange(other.m_database, nullptr)} {}

Transaction::~Transaction() {
    if (m_database && m_database->in_transaction()) {
        // Nothing can be done about a failed rollback: SQLite undoes the rest on the next open.
        static_cast<void>(m_database->run("ROLLBACK"));
    }
}

Result<void> Transaction::commit() {
    return m_database->run("COMMIT");
}

} // namespace sagitta::store
