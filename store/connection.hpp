// What a Store holds: its connection and the statements that it keeps prepared.
#pragma once

#include "store/database.hpp"
#include "store/store.hpp"

#include <optional>
#include <sys/types.h>

namespace sagitta::store {

struct Store::Connection {
    std::filesystem::path file; ///< as it was named
    dev_t device;
    ino_t inode;
    Database database;
    // Prepared on first use; declared after the database, which must outlive them.
    std::optional<Statement> insert_movement;
    std::optional<Statement> find_hour;
    std::optional<Statement> replace_hour;
    std::optional<Statement> insert_event;

    /// The kept statement, prepared when it is not there yet.
    [[nodiscard]] Result<Statement*> kept(std::optional<Statement>& slot, std::string_view sql);
    /// @return not_found when the file was moved or deleted since it was opened: what is written
    ///         now would be lost
    [[nodiscard]] Result<void> check_in_place() const;
    [[nodiscard]] Error unreadable_row(const char* table) const;
};

/// Opens a file that exists and brings it up to date when writing.
[[nodiscard]] Result<Database> open_sound_file(const std::filesystem::path& file, Mode mode,
                                               const OpenOptions& options);

} // namespace sagitta::store
