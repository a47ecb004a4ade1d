#!/bin/sh
# The main job with one command: installs what is missing, builds a release binary, runs it on sample-images/ or on
# the folder given, prints the summary and where the report is.
#   ./pipeline/run.sh [FOLDER] [further options of `sward run`]
set -eu
home=$(cd "$(dirname "$0")/.." && pwd)
. "$home/pipeline/setup.sh"

folder="$home/sample-images"
case "${1:-}" in
    ""|-*) ;;
    *) folder=$1; shift ;;
esac
[ -d "$folder" ] || sward_die "'$folder' is no folder. Use: ./pipeline/run.sh [FOLDER]"

# shellcheck disable=SC2086
sward_setup $sward_build_packages
log="$home/build/build.log"
mkdir -p "$home/build"
echo "sward: building (log: build/build.log)"
{ cmake -S "$home" -B "$home/build" -G Ninja -DCMAKE_BUILD_TYPE=Release -DBUILD_TESTING=OFF \
    && cmake --build "$home/build"; } >"$log" 2>&1 || { tail -n 25 "$log" >&2; sward_die "the build failed; the whole log is in build/build.log"; }

code=0
"$home/build/sward" run "$folder" "$@" || code=$?
case $code in
    0) ;;
    3) echo "sward: done. Some micrographs could not be used; their rows and the report say why." ;;
    4) echo "sward: done. A target is missed." ; exit 4 ;;
    *) exit "$code" ;;
esac
