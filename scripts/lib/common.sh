# Sourced by the scripts beside this folder: strict mode, the project's root as working folder,
# readable progress. Long output goes to build/logs; what failed is shown.
# shellcheck shell=bash
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/../.."
export LC_ALL=C.UTF-8
logs=build/logs
mkdir -p "$logs"

say() { printf '%s\n' "$*"; }

die() {
    printf '%s: %s\n' "${0##*/}" "$*" >&2
    exit 1
}

# step NAME COMMAND...: runs the command with its output in build/logs/NAME.log and says how long
# it took; on failure shows the log's end and returns the command's status.
step() {
    local name=$1 log="$logs/$1.log" started=$SECONDS status=0
    shift
    printf '%-18s ' "$name"
    "$@" >"$log" 2>&1 </dev/null || status=$?
    if ((status == 0)); then
        printf 'done in %d s\n' $((SECONDS - started))
    else
        printf 'FAILED after %d s; the end of %s:\n' $((SECONDS - started)) "$log"
        tail -n 60 "$log" | sed 's/^/    /'
    fi
    return "$status"
}

# build PRESET [TARGET...]: configures and builds a preset; without targets, all of it.
build() {
    local preset=$1 targets=()
    shift
    (($# == 0)) || targets=(--target "$@")
    step "configure-$preset" cmake --preset "$preset" &&
        step "build-$preset" cmake --build --preset "$preset" "${targets[@]}"
}
