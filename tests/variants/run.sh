#!/bin/sh
# Writes the variants and holds them against their known pixels and pixel sizes; then the program looks at the whole folder
# at once: it ends with 3 and no file is missing.  run.sh CHECKER SWARD; 77 where there is no python3
set -u
command -v python3 >/dev/null || { echo "skipped: python3 is not installed"; exit 77; }
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
python3 "$(dirname "$0")/write.py" "$work" || exit 1
"$1" "$work" || exit 1
cd "$work" || exit 1
set -- "$2" *.png *.tif *.jpg
sward=$1
shift
"$sward" inspect --json "$@" >json 2>err
[ $? -eq 3 ] || { echo "inspect of all files did not end with 3"; exit 1; }
[ "$(grep -c '"file"' json)" -eq $# ] || { echo "$# files, but $(grep -c '"file"' json) entries"; exit 1; }
