# Sourced by scripts/lint: each check is shown a small tree that it must refuse, and one that it
# must let pass.
# shellcheck shell=bash

passed=0 failed=0

# expect refused|clean CHECK FILE LINE...: writes the file into an empty tree and runs the check.
expect() {
    local wanted=$1 check=$2 file=$3 found verdict=clean tree
    shift 3
    tree=$(mktemp -d)
    mkdir -p "$tree/${file%/*}"
    printf '%s\n' "$@" >"$tree/$file"
    [[ $file != scripts/* ]] || chmod +x "$tree/$file"
    found=$(cd "$tree" && "$check")
    rm -r "$tree"
    [[ -z $found ]] || verdict=refused
    if [[ $verdict == "$wanted" ]]; then
        passed=$((passed + 1))
    else
        failed=$((failed + 1))
        say "FAILED: $check of $file should be $wanted: $*"
        [[ -z $found ]] || say "    $found"
    fi
}

self_test() {
    expect clean check_arrows store/a.cpp '#include "estimator/units.hpp"' '#include <vector>'
    expect refused check_arrows estimator/a.cpp '#include "store/store.hpp"'
    expect refused check_arrows input/a.hpp '#include "config/settings.hpp"'
    expect refused check_arrows report/a.cpp '#include "daemon/loop.hpp"'
    expect refused check_arrows store/a.cpp '#include "store.hpp"'
    expect clean check_pure_estimator estimator/a.cpp '// not <fstream>, not time(0)' \
        'Micros movement_time(int); double t = path.time(3); auto s = "std::cout";'
    expect refused check_pure_estimator estimator/a.cpp '#include <fstream>'
    expect refused check_pure_estimator estimator/a.cpp 'auto now = std::chrono::steady_clock::now();'
    expect refused check_pure_estimator estimator/a.cpp 'std::random_device device;'
    expect refused check_pure_estimator estimator/a.cpp 'auto now = time(nullptr);'
    expect refused check_pure_estimator estimator/a.cpp '/* a */ std::thread worker;'
    expect clean check_owners store/a.cpp '#include <sqlite3.h>'
    expect refused check_owners store/a.hpp '#include <sqlite3.h>'
    expect refused check_owners report/a.cpp '#include <sqlite3.h>'
    expect clean check_owners input/a.cpp '#include <libevdev/libevdev.h>'
    expect refused check_owners daemon/a.cpp '#include <libevdev/libevdev.h>'
    expect refused check_owners input/a.hpp '#include <libudev.h>'
    expect refused check_owners estimator/a.cpp '#include <yaml-cpp/yaml.h>'
    expect refused check_owners store/a.cpp '#include <spdlog/spdlog.h>'
    expect refused check_owners report/a.cpp '#include <systemd/sd-daemon.h>'
    expect refused check_owners store/a.cpp '#include <CLI/CLI.hpp>'
    expect clean check_left_open store/a.cpp '// all done'
    expect refused check_left_open store/a.cpp '// TODO: the rest'
    expect clean check_headers store/a.hpp '// Rows.' '#pragma once'
    expect refused check_headers store/a.hpp '#pragma once'
    expect refused check_headers store/a.hpp '// Rows.'
    expect refused check_headers store/a.hpp '// Rows.' '#pragma once' 'using namespace std;'
    expect clean check_scripts scripts/a '#!/bin/bash' 'set -euo pipefail' 'true'
    expect refused check_scripts scripts/a '#!/bin/bash' 'true'
    expect refused check_scripts scripts/a '#!/bin/bash' 'set -euo pipefail' 'if true'
    expect refused check_text store/a.cpp 'int a; '
    if command -v clang-format >/dev/null; then
        expect refused check_format store/a.cpp 'int   a ;'
        expect clean check_format store/a.cpp 'int a;'
    fi
    say "$passed passed, $failed failed"
    ((failed == 0))
}
