#!/bin/sh
# Explores every fuzz target with clang for so many minutes each (default 1), two at a time, starting from the committed
# corpus. What is found stays in build-fuzz/found; the corpus itself is not changed. Exit 1 when something broke.
#   ./tests/fuzz/run.sh [MINUTES] [TARGET...]
set -eu
cd "$(dirname "$0")/../.."
minutes=${1:-1}
[ $# -gt 0 ] && shift
case $minutes in *[!0-9]*|'') echo "usage: $0 [MINUTES] [TARGET...]" >&2; exit 2 ;; esac
command -v clang >/dev/null || { echo "clang is missing: apt-get install clang" >&2; exit 2; }
targets=${*:-load_memory instrument_text xml_scale csv_parse json_parse spectrum_parse}
build=${SWARD_FUZZ_BUILD:-build-fuzz}
cmake -S . -B "$build" -G Ninja -DCMAKE_C_COMPILER=clang -DCMAKE_BUILD_TYPE=RelWithDebInfo -DSWARD_FUZZ=ON \
    -DSWARD_SANITIZE=address,undefined >/dev/null
explorers=""
for t in $targets; do explorers="$explorers explore_$t"; done
# shellcheck disable=SC2086
cmake --build "$build" --target $explorers >/dev/null
mkdir -p "$build/found"
failed=0 running=0
for t in $targets; do
    mkdir -p "$build/seeds/$t"
    (
        "$build/tests/fuzz/explore_$t" -max_total_time=$((minutes * 60)) -max_len=32768 -timeout=20 -rss_limit_mb=2048 \
            -artifact_prefix="$build/found/$t-" "$build/seeds/$t" "tests/fuzz/corpus/$t" >"$build/$t.log" 2>&1 ||
            touch "$build/$t.broke"
    ) &
    running=$((running + 1))
    if [ $running -eq 2 ]; then wait; running=0; fi
done
wait
for t in $targets; do
    if [ -e "$build/$t.broke" ]; then
        rm -f "$build/$t.broke"
        failed=1
        echo "$t: broke, see $build/$t.log and $build/found"
    else
        echo "$t: $(grep -c . "$build/$t.log") lines of log, $(find "$build/seeds/$t" -type f | wc -l) new inputs, nothing broke"
    fi
done
exit $failed
