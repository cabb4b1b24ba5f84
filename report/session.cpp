#include "report/session.hpp"

#include "report/table.hpp"

#include <algorithm>
#include <fmt/format.h>

namespace sagitta::report {

using estimator::ErrorCode;
using estimator::fail;

std::string Style::heading(const std::string& text) const {
    return colour ? "\033[1m" + text + "\033[0m" : text;
}

std::string Style::warning(const std::string& text) const {
    return colour ? "\033[33m" + text + "\033[0m" : text;
}

Result<store::Store> open_for_reading(const Session& session) {
    auto opened = store::Store::open(session.store_file, store::Mode::read_only, session.now);
    if (opened) {
        return std::move(opened->store);
    }
    if (opened.error().code == ErrorCode::not_found) {
        const std::string next =
            session.store_named
                ? "check the name given with --store"
                : "start recording with 'systemctl --user enable --now sagittad', or see "
                  "simulated data with 'sagitta demo'";
        return fail(ErrorCode::not_found, "there is no store at " + session.store_file.string() +
                                              ": nothing has been recorded there yet; " + next);
    }
    return tl::unexpected{opened.error()};
}

Result<store::PointerId> find_pointer(const store::Store& store, const std::string& name) {
    const auto pointers = store.pointers();
    if (!pointers) {
        return tl::unexpected{pointers.error()};
    }
    std::vector<const store::StoredPointer*> similar;
    std::string names;
    for (const store::StoredPointer& pointer : *pointers) {
        if (pointer.name == name) {
            return pointer.id;
        }
        if (pointer.name.find(name) != std::string::npos) {
            similar.push_back(&pointer);
        }
        names += (names.empty() ? "'" : ", '") + printable(pointer.name) + "'";
    }
    if (similar.size() == 1) {
        return similar.front()->id;
    }
    if (similar.size() > 1) {
        return fail(ErrorCode::bad_value,
                    fmt::format("--pointer '{}' fits several pointers of the store; give the whole "
                                "name of one: {}",
                                printable(name), names));
    }
    return fail(ErrorCode::not_found,
                fmt::format("the store {} has no pointer named '{}'; it has {}",
                            store.file().string(), printable(name),
                            names.empty() ? std::string{"none yet"} : names));
}

std::string pointer_title(const store::StoredPointer& pointer) {
    std::string title = printable(pointer.name.empty() ? "unnamed pointer" : pointer.name);
    switch (pointer.origin) {
    case estimator::Origin::simulated:
        return title + " (simulated)";
    case estimator::Origin::recording:
        return title + " (recording)";
    case estimator::Origin::live:
        return title;
    }
    return title;
}

} // namespace sagitta::report
