# Sourced after common.sh: every Debian package that the scripts need, by purpose, and the one way
# they are installed.
# shellcheck shell=bash

# To build the two programs.
build_packages=(
    g++ cmake ninja-build pkg-config
    libeigen3-dev libboost-dev libexpected-dev
    libsqlite3-dev libyaml-cpp-dev
    libevdev-dev libudev-dev libsystemd-dev
    libspdlog-dev libfmt-dev
    libcli11-dev nlohmann-json3-dev libhowardhinnant-date-dev
)
# To build and run the tests, and to check the formatting.
test_packages=(doctest-dev clang-format)
# To run the fuzz targets with libFuzzer.
fuzz_packages=(clang doctest-dev)
# To boot a real kernel in a virtual machine.
guest_packages=(qemu-system-x86 busybox-static cpio kmod zstd)

# missing_packages PACKAGE...: prints those that are not installed.
missing_packages() {
    local package
    for package in "$@"; do
        [[ $(dpkg-query -W -f='${db:Status-Status}' "$package" 2>/dev/null) == installed ]] ||
            printf '%s\n' "$package"
    done
}

# as_root COMMAND...: runs apt or dpkg with the rights they need.
as_root() {
    if ((EUID == 0)); then
        env DEBIAN_FRONTEND=noninteractive "$@"
    else
        sudo env DEBIAN_FRONTEND=noninteractive "$@"
    fi
}

# install_packages PACKAGE...: installs what is missing; does nothing when all are there.
install_packages() {
    local missing
    command -v dpkg-query >/dev/null && command -v apt-get >/dev/null ||
        die "needs Debian 12 or a system like it, with apt; on another, install these by its own" \
            "means and run the steps of this script by hand: $*"
    mapfile -t missing < <(missing_packages "$@")
    ((${#missing[@]} > 0)) || return 0
    ((EUID == 0)) || command -v sudo >/dev/null ||
        die "these packages are missing and only root can install them: ${missing[*]}; run as" \
            "root: apt-get install ${missing[*]}"
    say "installing with apt: ${missing[*]}"
    step apt-update as_root apt-get -q update
    step apt-install as_root apt-get -q -y --no-install-recommends install "${missing[@]}"
}
