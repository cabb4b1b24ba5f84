# Sourced by scripts/lint: the checks. Each check_* function prints one line "FILE:LINE: why" for
# each thing it refuses, and nothing when all is well. They run in the root of the tree to check.
# shellcheck shell=bash

source_folders=(estimator store config input daemon report tests)

# sources [FOLDER...]: the C++ files of these folders, of all by default.
sources() {
    local folder folders=("$@")
    ((${#folders[@]} > 0)) || folders=("${source_folders[@]}")
    for folder in "${folders[@]}"; do
        [[ ! -d $folder ]] || find "$folder" -type f \( -name '*.cpp' -o -name '*.hpp' \)
    done | sort
}

# code FILE...: prints "FILE:LINE:TEXT" of each line, comments and the content of strings left out.
code() {
    (($# > 0)) || return 0
    awk '
        FNR == 1 { in_comment = 0 }
        {
            text = $0
            if (text !~ /^[ \t]*#[ \t]*include/) gsub(/"([^"\\]|\\.)*"/, "\"\"", text)
            out = ""
            while (text != "") {
                if (in_comment) {
                    end = index(text, "*/")
                    if (!end) break
                    text = substr(text, end + 2)
                    in_comment = 0
                    continue
                }
                line = index(text, "//")
                block = index(text, "/*")
                if (line && (!block || line < block)) { out = out substr(text, 1, line - 1); break }
                if (!block) { out = out text; break }
                out = out substr(text, 1, block - 1)
                text = substr(text, block + 2)
                in_comment = 1
            }
            print FILENAME ":" FNR ":" out
        }' "$@"
}

# refuse REASON PATTERN FILE...: prints the place of each line of code that matches.
refuse() {
    local reason=$1 pattern=$2
    shift 2
    code "$@" | { grep -E "^[^:]*:[0-9]+:.*($pattern)" || true; } |
        awk -F: -v reason="$reason" '{
            place = $1 ":" $2
            sub(/^[^:]*:[^:]*:[ \t]*/, "")
            print place ": " reason ": " $0
        }'
}

# Files of the whole tree except those under the folders named.
sources_outside() {
    local pattern
    pattern=$(printf '%s|' "$@")
    sources | { grep -vE "^(${pattern%|})" || true; }
}

check_arrows() {
    local folder allowed
    while read -r folder allowed; do
        [[ -d $folder ]] || continue
        code $(sources "$folder") |
            { grep -E ':[ \t]*#[ \t]*include[ \t]*"' || true; } |
            awk -F: -v folder="$folder" -v allowed="$allowed" '
                BEGIN { n = split(allowed, names, " "); for (i = 1; i <= n; ++i) may[names[i]] = 1 }
                {
                    split($0, part, "\"")
                    other = part[2]
                    if (other !~ /\//) why = "name the header with its folder"
                    else {
                        sub(/\/.*/, "", other)
                        if (other == folder || other in may) next
                        why = folder "/ may not use " other "/"
                    }
                    print $1 ":" $2 ": " why ": " part[2]
                }'
    done <<'ARROWS'
estimator
store estimator
config estimator
input estimator
daemon estimator store config input
report estimator store config input
ARROWS
}

check_pure_estimator() {
    local headers='fstream|iostream|cstdio|stdio\.h|filesystem|thread|mutex|condition_variable|future|ctime|time\.h|syncstream|unistd\.h|fcntl\.h|sys/[a-z]+\.h|spdlog/[^>]*'
    refuse "the estimator has no file, clock, log or thread" \
        "#[ \t]*include[ \t]*<($headers)>" $(sources estimator)
    refuse "the estimator has no file, clock, log, thread or unseeded random" \
        'std::(random_device|cout|cerr|clog|thread|jthread|async|fopen|printf|getenv|time|rand)\b|_clock::now|(^|[^_[:alnum:].>:])(time|getenv|fopen|printf|fprintf|rand|srand|clock_gettime)[ \t]*\(' \
        $(sources estimator)
}

check_owners() {
    refuse "SQLite belongs to the bodies of store/" '#[ \t]*include[ \t]*<sqlite3' \
        $(sources | { grep -vE '^(store|tests)/.*\.cpp$' || true; })
    refuse "libevdev belongs to the bodies of input/" '#[ \t]*include[ \t]*<libevdev/' \
        $(sources | { grep -vE '^(input|tests)/.*\.cpp$' || true; })
    refuse "libudev belongs to the bodies of input/ and daemon/" '#[ \t]*include[ \t]*<libudev' \
        $(sources | { grep -vE '^(input|daemon|tests)/.*\.cpp$' || true; })
    refuse "yaml-cpp belongs to the bodies of config/, input/ and report/" \
        '#[ \t]*include[ \t]*<yaml-cpp' \
        $(sources | { grep -vE '^(config|input|report|tests)/.*\.cpp$' || true; })
    refuse "library code never logs: spdlog belongs to daemon/" '#[ \t]*include[ \t]*<spdlog' \
        $(sources_outside daemon/ tests/daemon/)
    refuse "the systemd library belongs to the bodies of daemon/" '#[ \t]*include[ \t]*<systemd/' \
        $(sources | { grep -vE '^daemon/.*\.cpp$' || true; })
    refuse "the command line belongs to the programs" '#[ \t]*include[ \t]*<CLI/' \
        $(sources_outside report/ daemon/ tests/)
}

check_left_open() {
    local file
    for file in $(sources) $(find scripts systemd config .ci -type f 2>/dev/null | sort) \
        CMakeLists.txt; do
        [[ -f $file && $file != scripts/lib/lint_* ]] || continue
        grep -nE '\b(TODO|FIXME|XXX|HACK)\b' "$file" | sed "s|^|$file:|" || true
    done
}

check_headers() {
    local file
    for file in $(sources | { grep '\.hpp$' || true; }); do
        [[ $(head -n 1 "$file") == //* ]] || say "$file:1: begin with what the header is for"
        grep -qx '#pragma once' "$file" || say "$file:1: no #pragma once"
        { grep -nE '^[ \t]*using[ \t]+namespace' "$file" | grep -v '_literals;$' || true; } |
            sed "s|^|$file:|; s|\$| (no using namespace in a header, literals excepted)|"
    done
}

check_scripts() {
    local file
    for file in $(find scripts .ci tests -type f -perm -100 2>/dev/null | sort); do
        [[ $(head -n 1 "$file") == '#!/'* ]] || {
            say "$file:1: executable without an interpreter line"
            continue
        }
        grep -qE 'set -euo pipefail|source .*lib/common\.sh' "$file" ||
            say "$file:1: a script stops at the first error: set -euo pipefail"
        bash -n "$file" 2>&1 || true
    done
}

check_text() {
    local file
    for file in $(sources) $(find scripts .ci -type f 2>/dev/null | sort); do
        { grep -nE '[ 	]+$' "$file" || true; } | sed "s|^\([0-9]*\):.*|$file:\1: trailing blanks|"
        [[ ! -s $file || -z $(tail -c 1 "$file") ]] || say "$file: no newline at the end"
    done
}

check_format() {
    local files
    mapfile -t files < <(sources)
    ((${#files[@]} > 0)) || return 0
    { clang-format --dry-run -Werror --style=file "${files[@]}" 2>&1 || true; } |
        awk -F: '/error:/ { ++places[$1] }
            END { for (file in places) print file ": run clang-format -i (" places[file] " places)" }' |
        sort
}

# Check function and what holds when it finds nothing.
checks=(
    "check_arrows each folder includes only the folders it may use"
    "check_pure_estimator the estimator has no file, clock, log, thread or unseeded random"
    "check_owners each library is included only where it belongs"
    "check_left_open nothing is marked as left open"
    "check_headers headers say what they are for and are read once"
    "check_scripts scripts parse and stop at the first error"
    "check_text lines end cleanly"
    "check_format the formatting is clang-format's"
)

# lint FOLDER: runs every check; the last line counts them.
lint() {
    local root=$1 entry check sentence found passed=0 failed=0
    cd "$root"
    for entry in "${checks[@]}"; do
        check=${entry%% *} sentence=${entry#* }
        if [[ $check == check_format ]] && ! command -v clang-format >/dev/null; then
            say "skipped: $sentence (clang-format is not installed)"
            continue
        fi
        found=$("$check")
        if [[ -z $found ]]; then
            say "ok: $sentence"
            passed=$((passed + 1))
        else
            say "FAILED: $sentence"
            sed 's/^/    /' <<<"$found"
            failed=$((failed + 1))
        fi
    done
    say "$passed passed, $failed failed"
    ((failed == 0))
}
