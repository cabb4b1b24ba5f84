// What every command is given: the settings, the person's calendar, the store's place and how to
// print; and what it gives back.
#pragma once

#include "config/settings.hpp"
#include "report/calendar.hpp"
#include "store/store.hpp"

#include <filesystem>
#include <optional>
#include <string>

namespace sagitta::report {

/// Emphasis on a terminal; it never carries meaning alone.
struct Style {
    bool colour = false;
    [[nodiscard]] std::string heading(const std::string& text) const;
    [[nodiscard]] std::string warning(const std::string& text) const;
};

struct Session {
    config::Settings settings;
    Calendar calendar;
    UtcTime now;
    std::filesystem::path store_file;
    /// The person named the store, on the command line.
    bool store_named = false;
    bool json = false;
    Style style;
    bool show_progress = false; ///< stderr is a terminal
};

/// What a command prints, and whether all was well.
struct Output {
    std::string text;
    bool all_well = true;
};

/// Opens the session's store for reading; a missing one is explained.
[[nodiscard]] Result<store::Store> open_for_reading(const Session& session);

/// The pointer of the store that the person means: its full name, or the only one whose name
/// contains the text.
/// @return not_found listing the names, bad_value when several match
[[nodiscard]] Result<store::PointerId> find_pointer(const store::Store& store,
                                                    const std::string& name);

/// "upright mouse (simulated)": a pointer's name for the screen, with the origin that the reader
/// must know of.
[[nodiscard]] std::string pointer_title(const store::StoredPointer& pointer);

} // namespace sagitta::report
