// Stands in for libFuzzer: runs the fuzz target once on every file named, and on every file of
// every folder named.

#include <cstdint>
#include <cstdio>
#include <exception>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <vector>

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size);

namespace {

bool replay(const std::filesystem::path& file) {
    std::ifstream stream{file, std::ios::binary};
    const std::vector<char> bytes{std::istreambuf_iterator<char>{stream}, {}};
    if (!stream.good() && !stream.eof()) {
        std::fprintf(stderr, "cannot read %s\n", file.c_str());
        return false;
    }
    const std::vector<std::uint8_t> data{bytes.begin(), bytes.end()};
    LLVMFuzzerTestOneInput(data.data(), data.size());
    return true;
}

} // namespace

int main(int argc, char** argv) {
    std::size_t replayed = 0;
    try {
        for (int i = 1; i < argc; ++i) {
            const std::filesystem::path place{argv[i]};
            if (!std::filesystem::is_directory(place)) {
                if (!replay(place))
                    return 1;
                ++replayed;
                continue;
            }
            for (const auto& entry : std::filesystem::recursive_directory_iterator{place}) {
                if (!entry.is_regular_file())
                    continue;
                if (!replay(entry.path()))
                    return 1;
                ++replayed;
            }
        }
    } catch (const std::exception& failure) {
        std::fprintf(stderr, "%s\n", failure.what());
        return 1;
    }
    std::printf("%zu inputs replayed\n", replayed);
    return replayed == 0 ? 1 : 0;
}
