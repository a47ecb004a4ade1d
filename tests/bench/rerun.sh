#!/bin/sh
# rerun.sh PROGRAM [SIZE]: processor time of a second run over 200 unchanged micrographs, each its own sample, as a share of the
# first: one JSON line. A ratio, because times alone say little on a busy machine.
set -eu
sward=$1
size=${2:-320x240}
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
"$sward" render --out "$work/in" --count 200 --size "$size" --spacing 120 >/dev/null
for file in "$work/in"/*.png; do mv "$file" "${file%.png}x.png"; done
seconds() { # user + system of a run
    LC_ALL=C bash -c 'TIMEFORMAT="%U %S"; time "$0" run "$1/in" --out "$1/o" --quiet' "$sward" "$work" 2>&1 | awk '{ print $1 + $2 }'
}
first=$(seconds)
second=$(seconds)
awk -v a="$first" -v b="$second" -v s="$size" 'BEGIN { printf "{\"bench\": \"second run over 200 unchanged micrographs of %s\", \"first_s\": %.2f, \"second_s\": %.2f, \"ratio\": %.3f}\n", s, a, b, b / a }'
