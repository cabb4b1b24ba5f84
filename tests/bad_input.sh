#!/bin/bash
# Gives the programs what they cannot use. Each time they must end with the right exit code and
# one clear sentence on standard error, and leave every file as it was.
# Usage: bad_input.sh SAGITTA SAGITTAD SAMPLE_EVEMU_RECORDING
set -euo pipefail
export LC_ALL=C.UTF-8 TZ=UTC
sagitta=$1 sagittad=$2 sample=$3
work=$(mktemp -d "${TMPDIR:-/tmp}/sagitta-bad-input-XXXXXX")
trap 'chmod -R u+rwX "$work"; rm -rf "$work"' EXIT
mkdir -p "$work"/{config,data,run,files} "$work"/log
chmod 0700 "$work/run"
export XDG_CONFIG_HOME=$work/config XDG_DATA_HOME=$work/data XDG_RUNTIME_DIR=$work/run
cd "$work/files" || exit 1
failures=0 checks=0

fail() {
    failures=$((failures + 1))
    printf 'FAILED: %s\n' "$1"
    [[ ! -s ../log/err ]] || sed 's/^/    /' ../log/err
}

# Names and contents of all files.
state() { find . -type f -print0 | sort -z | xargs -0 -r cksum; }

# run EXIT_CODE COMMAND...: checks the code and that no sanitizer or exception spoke.
run() {
    local wanted=$1 code=0
    shift
    checks=$((checks + 1))
    timeout 20 "$@" >../log/out 2>../log/err || code=$?
    ((code == wanted)) || fail "exit code $code instead of $wanted: $*"
    ! grep -qE 'terminate called|Sanitizer|runtime error|what\(\)' ../log/err ||
        fail "no sentence for people: $*"
}

# refused EXIT_CODE WORDS COMMAND...: one line on standard error with these words, no file changed.
refused() {
    local code=$1 words=$2 before
    shift 2
    before=$(state)
    run "$code" "$@"
    [[ $(wc -l <../log/err) == 1 ]] || fail "not one line on standard error: $*"
    grep -qF -- "$words" ../log/err || fail "says nothing of \"$words\": $*"
    [[ $(state) == "$before" ]] || fail "changed a file: $*"
}

# accepted WORDS COMMAND...: done, with these words anywhere in what it said.
accepted() {
    local words=$1
    shift
    run 0 "$@"
    grep -qiF -- "$words" ../log/out ../log/err || fail "says nothing of \"$words\": $*"
}

# recording CLICKS [FIRST_SECOND]: evemu text of moves to the right, each ended by a click.
recording() {
    sed '/^E:/d' "$sample"
    awk -v clicks="$1" -v second="${2:-1767600000}" '
        function event(us, type, code, value) {
            printf "E: %d.%06d %04x %04x %04d\n", second + us / 1000000, us % 1000000, type, code, value
        }
        function packet(us, type, code, value) {
            event(us, type, code, value); event(us, 0, 0, 0)
        }
        BEGIN {
            for (click = 0; click < clicks; ++click) {
                us = 2000000 * click
                for (i = 1; i <= 50; ++i) packet(us + 8000 * i, 2, 0, 1 + int(i * (51 - i) / 80))
                packet(us + 500000, 1, 272, 1)
                packet(us + 580000, 1, 272, 0)
            }
        }'
}

recording 40 >good
accepted "40 movements were scored" "$sagitta" replay --store good.db good

# Recordings.
: >empty
head -c 4096 /dev/zero | tr '\0' '\377' >garbage
printf 'a letter\n' >text
head -c 10 good.db >tiny
mkdir folder
truncate -s 10G ../hole # outside, since state() reads all of this folder
for store in "" "--store=good.db"; do
    refused 1 "is empty" "$sagitta" replay $store empty
    for file in garbage text tiny ../hole; do
        refused 1 "is no recording of a pointer" "$sagitta" replay $store "$file"
    done
    refused 1 "is a folder" "$sagitta" replay $store folder
    refused 1 "No such file" "$sagitta" replay $store nowhere
done
rm ../hole
recording 3 1000 >undated
refused 1 "--start" "$sagitta" replay --store good.db undated
head -c -9 good >cut
accepted "cut" "$sagitta" replay cut
{ recording 3 1767600100; recording 3 1767600000 | grep '^E:'; } >reversed
accepted "backwards" "$sagitta" replay reversed
sed 's/0002 0000 0009/0002 0000 2147483647/' good >huge
accepted "32767" "$sagitta" replay huge
refused 1 "already" "$sagitta" replay --store good.db good

# Configs.
mkdir folder.yaml
: >empty.yaml
printf '%0*d' 2000 0 | sed 's/0/[/g' >open.yaml
{ cat open.yaml; tr '[' ']' <open.yaml; } >deep.yaml
printf 'movements:\n  rest_ms: 2\377\n' >latin.yaml
printf 'movements:\n  rest_sm: 200\n' >key.yaml
printf 'movements:\n  rest_ms: long\n' >type.yaml
printf 'movements:\n  rest_ms: -1\n' >range.yaml
while IFS='|' read -r file words; do
    refused 1 "$words" "$sagitta" week --store good.db --config "$file"
    refused 1 "$words" "$sagittad" --store s.db --config "$file"
done <<'END'
folder.yaml|is a folder
open.yaml|open.yaml:1:
deep.yaml|deep.yaml:1:
latin.yaml|latin.yaml:2:13: byte 0xFF is not UTF-8
key.yaml|key.yaml:2:3: unknown key 'rest_sm'
type.yaml|type.yaml:2:12:
range.yaml|range.yaml:2:12:
nowhere.yaml|there is no such file
END
accepted "week" "$sagitta" week --store good.db --config empty.yaml

# Stores.
cp good.db newer.db
printf '\0\0\0\143' | dd of=newer.db bs=1 seek=60 conv=notrunc status=none # user_version 99
# Without our marks and tables it is somebody else's.
LC_ALL=C sed 's/movement/paperrow/g; s/pointer/printer/g; s/condition/furniture/g' good.db >other.db
head -c 12 /dev/zero | dd of=other.db bs=1 seek=60 conv=notrunc status=none
while IFS='|' read -r file words; do
    refused 1 "$words" "$sagitta" week --store "$file"
    refused 1 "$words" "$sagitta" export --store "$file" --format csv
    refused 1 "$words" "$sagitta" export --store "$file" --table hours --format jsonl
    [[ $file != text && $file != nowhere.db ]] || continue
    refused 1 "$words" "$sagitta" replay --store "$file" good
    refused 1 "$words" "$sagittad" --store "$file"
done <<'END'
newer.db|later version
other.db|another program's
folder|not a regular file
text|damaged
nowhere.db|there is no store
END
run 1 "$sagitta" check --store newer.db

# A store cut at any length is refused, and set aside whole by who writes.
size=$(stat -c %s good.db)
for ((length = 1; length < size; length += size / 40)); do
    head -c "$length" good.db >cut.db
    refused 1 "damaged" "$sagitta" week --store cut.db
done
cp cut.db before
accepted "aside as" "$sagitta" replay --store cut.db good
cmp -s before cut.db.damaged-* || fail "a damaged store was not kept as it was"
accepted "40" "$sagitta" week --store cut.db --ending 2026-01-05

# Usage.
refused 2 "" "$sagitta" week --ending yesterday-ish --store good.db
run 2 "$sagitta" replay
run 2 "$sagitta" export --store good.db --format xls
run 2 "$sagittad" --no-such-option

# A store or a folder that may not be written. Permissions do not bind root, who becomes nobody.
as_user=()
if ((EUID == 0)); then
    as_user=(setpriv --reuid 65534 --regid 65534 --clear-groups)
    chmod 0711 "$work"
    chmod -R a+rX "$work/files"
fi
recording 5 1767700000 >more
chmod a+r more
chmod 0444 good.db
chmod 0555 .
if "${as_user[@]}" test -x "$sagitta" 2>/dev/null; then
    refused 1 "good.db" "${as_user[@]}" "$sagitta" replay --store "$PWD/good.db" more
    refused 1 "new.db" "${as_user[@]}" "$sagitta" replay --store "$PWD/new.db" more
    refused 1 "good.db" "${as_user[@]}" "$sagittad" --store "$PWD/good.db"
    run 0 "${as_user[@]}" "$sagitta" week --store "$PWD/good.db" --ending 2026-01-05
else
    printf 'left out: read-only stores, since nobody may not run %s\n' "$sagitta"
fi
chmod 0755 .
chmod 0644 good.db

# A disk that fills up: what was stored before stays readable.
mkdir disk
full_disk() {
    mount -t tmpfs -o size=256k none disk || exit 1
    cp good.db disk/s.db && recording 4000 1767800000 >much
    run 1 "$sagitta" replay --store disk/s.db much
    grep -qF space ../log/err || fail "says nothing of space: disk/s.db"
    dd if=/dev/zero of=disk/filler bs=1k status=none 2>../log/err || true # until full
    for store in disk/s.db disk/new.db; do
        run 1 "$sagitta" replay --store "$store" more
        grep -qF space ../log/err || fail "says nothing of space: $store"
    done
    rm disk/filler
    "$sagitta" export --store disk/s.db --format csv >../log/rows
    [[ $(wc -l <../log/rows) -ge 41 ]] || fail "a full disk lost rows"
    accepted "5 movements were scored" "$sagitta" replay --store disk/s.db more
    exit "$((failures > 0))"
}
if unshare --user --map-root-user --mount true 2>/dev/null; then
    failures_before=$failures
    export -f full_disk refused accepted run state fail recording
    export sagitta sagittad sample
    failures=0 checks=0 unshare --user --map-root-user --mount bash -c full_disk ||
        failures=$((failures_before + 1))
else
    printf 'left out: a full disk, since this kernel lets no user mount one\n'
fi

printf '%d commands, %d failures\n' "$checks" "$failures"
((failures == 0))
