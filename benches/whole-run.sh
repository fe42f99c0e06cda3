#!/usr/bin/env bash
# What a frame costs planish, beside a bare parse and chemfiles' own read of the same text dump.
#
#     bash benches/whole-run.sh [ATOMS] [SHORT] [LONG] [REPEATS]
#
# Two dumps of ATOMS atoms, of SHORT and LONG frames, are written to a temporary folder (40 bytes an atom and frame). Every
# program reads both, REPEATS times in turn; the cost of a frame is the slope between the two files, so that what does not
# grow with frames (start, reference sites, fit) drops out of it. Medians are printed, of the time on the clock and of
# processor time: on a machine that others use at the same time only the second means anything, and what a second
# thread wins cannot be seen there.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
export LC_ALL=C

atoms=${1:-100000} short=${2:-60} long=${3:-240} repeats=${4:-5}
built=$(cargo build --release --bench whole_run --bin planish --message-format json |
    sed -n 's/.*"executable":"\([^"]*\)".*/\1/p')
planish=$(grep '/planish$' <<<"$built")
bench=$(grep 'whole_run' <<<"$built")

folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
for frames in "$short" "$long"; do
    "$bench" dump "$atoms" "$frames" "$folder/$frames.lammpstrj"
    # The harmonic plate, whose fit is short: the cost of reading is what this script is about.
    cat >"$folder/$frames.toml" <<EOF
[pipeline]
name = "$frames"
[stage.fit]
plate = "harmonic"
[[sheet]]
name = "honeycomb"
  [[sheet.run]]
  name = "noise"
  trajectory = "$frames.lammpstrj"
  species = ["C"]
  temperature = "300 K"
  timestep = "1 fs"
EOF
done

# Runs a command; appends its name, frames, seconds on the clock and seconds of processor time to the list of times.
measure() {
    local name=$1 frames=$2
    shift 2
    local TIMEFORMAT='%R %U %S' spent
    rm -rf "$folder/$frames.out"
    # Status 1 and 2 are verdicts on noise that is no sheet; that blocks were measured is checked below.
    spent=$({ time "$@" >"$folder/output" 2>&1 || true; } 2>&1)
    awk -v name="$name" -v frames="$frames" '{ print name, frames, $1, $2 + $3 }' <<<"$spent" >>"$folder/times"
    if [[ $name == planish* && ! -d $folder/$frames.out/blocks ]]; then
        cat "$folder/output" >&2
        exit 1
    fi
}

for ((repeat = 0; repeat < repeats; repeat++)); do
    for frames in "$short" "$long"; do
        measure bare-parse "$frames" "$bench" parse "$folder/$frames.lammpstrj"
        measure chemfiles "$frames" "$bench" chemfiles "$folder/$frames.lammpstrj"
        measure planish-1-thread "$frames" "$planish" run "$folder/$frames.toml" --threads 1 --quiet
        measure planish-2-threads "$frames" "$planish" run "$folder/$frames.toml" --threads 2 --quiet
    done
done

# The median of column $3 over the runs of program $1 on the file of $2 frames.
median() {
    awk -v name="$1" -v frames="$2" -v column="$3" '$1 == name && $2 == frames { print $column }' "$folder/times" |
        sort -g | awk '{ value[NR] = $1 } END { print (value[int((NR + 1) / 2)] + value[int(NR / 2) + 1]) / 2 }'
}

echo "$atoms atoms, $short and $long frames, medians of $repeats"
echo
echo "| program | clock, ms a frame | processor, ms a frame | million atoms a processor second | to the bare parse | constant part, s |"
echo "| --- | --- | --- | --- | --- | --- |"
bare=
for name in bare-parse chemfiles planish-1-thread planish-2-threads; do
    slope() {
        awk -v a="$(median "$name" "$short" "$1")" -v b="$(median "$name" "$long" "$1")" -v n=$((long - short)) \
            'BEGIN { print 1000 * (b - a) / n }'
    }
    clock=$(slope 3) processor=$(slope 4)
    bare=${bare:-$processor}
    awk -v name="$name" -v clock="$clock" -v processor="$processor" -v bare="$bare" -v atoms="$atoms" \
        -v total="$(median "$name" "$short" 4)" -v short="$short" 'BEGIN {
            printf "| %s | %.2f | %.2f | %.1f | %.2f | %.2f |\n", name, clock, processor, atoms / processor / 1000,
                processor / bare, total - short * processor / 1000 }'
done
