// One SQLite connection and its prepared statements, with results instead of codes. One thread.
#pragma once

#include "estimator/result.hpp"

#include <chrono>
#include <cstddef>
#include <cstdint>
#include <filesystem>
#include <memory>
#include <optional>
#include <span>
#include <string>
#include <string_view>

struct sqlite3;
struct sqlite3_stmt;

namespace sagitta::store {

using estimator::Error;
using estimator::ErrorCode;
using estimator::fail;
using estimator::Result;

/// A prepared statement. Parameters are bound in their order; a failed bind shows in step().
/// Must not outlive its Database.
class Statement {
public:
    explicit Statement(sqlite3_stmt* owned) noexcept : m_statement{owned} {}

    void bind_integer(std::int64_t value);
    void bind_integer(std::optional<std::int64_t> value);
    void bind_real(double value); ///< NaN becomes NULL
    void bind_text(std::string_view value);
    void bind_blob(std::span<const std::byte> value);
    void bind_null();

    /// @return true while there is a row; the database's error otherwise
    [[nodiscard]] Result<bool> step();
    /// Ready for new parameters; releases the locks of an unfinished read.
    void reset() noexcept;

    /// The current row's column; valid until the next step.
    [[nodiscard]] bool is_null(int column) const noexcept;
    [[nodiscard]] std::int64_t integer(int column) const noexcept;
    [[nodiscard]] double real(int column) const noexcept; ///< NULL becomes NaN
    [[nodiscard]] std::string_view text(int column) const noexcept;
    [[nodiscard]] std::span<const std::byte> blob(int column) const noexcept;

private:
    struct Finalize {
        void operator()(sqlite3_stmt* statement) const noexcept;
    };
    std::unique_ptr<sqlite3_stmt, Finalize> m_statement;
    int m_bound = 0;
    int m_bind_code = 0;
};

/// Resets a kept statement when a scope ends.
class ScopedReset {
public:
    explicit ScopedReset(Statement& statement) noexcept : m_statement{statement} {}
    ScopedReset(const ScopedReset&) = delete;
    ScopedReset& operator=(const ScopedReset&) = delete;
    ~ScopedReset() { m_statement.reset(); }

private:
    Statement& m_statement;
};

class Database {
public:
    enum class Access {
        write,    ///< reads and writes
        read,     ///< reads, taking the locks that make reading beside a writer safe
        immutable ///< reads without locks or side files; for files that nobody writes
    };

    /// @param file  absolute
    [[nodiscard]] static Result<Database> open(const std::filesystem::path& file, Access access,
                                               std::chrono::milliseconds busy_timeout);

    /// Runs statements that give no rows.
    [[nodiscard]] Result<void> run(const char* sql);
    /// @return ErrorCode::damaged when the file's tables do not fit the statement
    [[nodiscard]] Result<Statement> prepare(std::string_view sql);
    /// First column of the first row; empty when there is no row or it is NULL.
    [[nodiscard]] Result<std::optional<std::int64_t>> integer(std::string_view sql);
    [[nodiscard]] Result<std::string> text(std::string_view sql);
    /// The file or its folder turned out not to be writable.
    [[nodiscard]] bool is_read_only() const noexcept;
    [[nodiscard]] bool in_transaction() const noexcept;
    [[nodiscard]] std::int64_t changed_rows() const noexcept;
    [[nodiscard]] std::int64_t last_row_id() const noexcept;

private:
    struct Close {
        void operator()(sqlite3* database) const noexcept;
    };
    explicit Database(sqlite3* owned) noexcept : m_database{owned} {}
    std::unique_ptr<sqlite3, Close> m_database;
};

/// A write transaction; rolled back unless committed.
class Transaction {
public:
    [[nodiscard]] static Result<Transaction> begin(Database& database);
    Transaction(Transaction&& other) noexcept;
    Transaction& operator=(Transaction&&) = delete;
    ~Transaction();
    [[nodiscard]] Result<void> commit();

private:
    explicit Transaction(Database& database) noexcept : m_database{&database} {}
    Database* m_database;
};

} // namespace sagitta::store
