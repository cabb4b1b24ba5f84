#include "tests/config/helpers.hpp"

namespace sagitta::config {
namespace {

/// Whether an entry called `pattern` counts for a pointer called `name`.
bool counts_for(const std::string& pattern, const std::string& name) {
    Settings settings;
    settings.pointers.push_back({});
    settings.pointers.back().name = pattern;
    return settings_for(settings, name) != nullptr;
}

} // namespace

TEST_CASE("an entry without * counts for the pointer of exactly its name") {
    CHECK(counts_for("Upright Mouse", "Upright Mouse"));
    CHECK_FALSE(counts_for("Upright Mouse", "Upright Mouse 2"));
    CHECK_FALSE(counts_for("Upright Mouse", "Upright"));
    CHECK_FALSE(counts_for("Upright Mouse", "upright mouse"));
}

TEST_CASE("* stands for any text, also none") {
    CHECK(counts_for("*", ""));
    CHECK(counts_for("*", "Upright Mouse"));
    CHECK(counts_for("Upright*", "Upright"));
    CHECK(counts_for("Upright*", "Upright Mouse"));
    CHECK(counts_for("*Mouse", "Upright Mouse"));
    CHECK(counts_for("U*t*e", "Upright Mouse"));
    CHECK(counts_for("**a*b**", "xxaxxabxx"));
    CHECK_FALSE(counts_for("*Mouse", "Upright Mouse 2"));
    CHECK_FALSE(counts_for("U*z*e", "Upright Mouse"));
}

TEST_CASE("many stars against a long name that does not fit end at once") {
    std::string pattern;
    for (int i = 0; i < 200; ++i) {
        pattern += "a*";
    }
    CHECK_FALSE(counts_for(pattern + "b", std::string(5000, 'a')));
}

TEST_CASE("the first entry that fits counts") {
    const Settings settings = settings_in("pointers:\n"
                                          "  - {name: Upright Mouse, cpi: 1600}\n"
                                          "  - {name: '*Mouse', cpi: 800}\n"
                                          "  - {name: '*', ignore: true}\n");
    REQUIRE(settings_for(settings, "Upright Mouse") != nullptr);
    CHECK(settings_for(settings, "Upright Mouse")->cpi == estimator::Cpi::of(1600.0));
    CHECK(settings_for(settings, "Flat Mouse")->cpi == estimator::Cpi::of(800.0));
    CHECK(settings_for(settings, "Thumb Trackball")->ignore);
    CHECK_FALSE(settings_for(settings, "Flat Mouse")->ignore);
    CHECK(settings_for(Settings{}, "Flat Mouse") == nullptr);
}

TEST_CASE("the file of XDG_CONFIG_HOME is found before any other") {
    const TempFolder folder;
    const auto file = folder.write("xdg/sagitta/sagitta.yaml", "");
    (void)folder.write("home/.config/sagitta/sagitta.yaml", "");
    const ScopedVariable xdg{"XDG_CONFIG_HOME", (folder.path() / "xdg").c_str()};
    const ScopedVariable home{"HOME", (folder.path() / "home").c_str()};
    CHECK(find_settings_file() == file);
}

TEST_CASE("the file below ~/.config is found when XDG_CONFIG_HOME is not set, or not absolute") {
    const TempFolder folder;
    const auto file = folder.write("home/.config/sagitta/sagitta.yaml", "");
    const ScopedVariable home{"HOME", (folder.path() / "home").c_str()};
    for (const char* unusable : {static_cast<const char*>(nullptr), "", "xdg"}) {
        const ScopedVariable xdg{"XDG_CONFIG_HOME", unusable};
        CHECK(find_settings_file() == file);
    }
}

TEST_CASE("without a file of the person's own only the one in /etc is left") {
    const TempFolder folder;
    const ScopedVariable home{"HOME", folder.path().c_str()};
    const ScopedVariable xdg{"XDG_CONFIG_HOME", nullptr};
    const auto found = find_settings_file();
    CHECK(found.has_value() == std::filesystem::exists("/etc/sagitta/sagitta.yaml"));
}

TEST_CASE("a link to nowhere is found, so that reading it tells why") {
    const TempFolder folder;
    std::filesystem::create_directories(folder.path() / "sagitta");
    std::filesystem::create_symlink("/nowhere", folder.path() / "sagitta" / "sagitta.yaml");
    const ScopedVariable xdg{"XDG_CONFIG_HOME", folder.path().c_str()};
    const auto found = find_settings_file();
    REQUIRE(found.has_value());
    CHECK(read_settings(*found).error().code == estimator::ErrorCode::not_found);
}

} // namespace sagitta::config
