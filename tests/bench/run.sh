#!/bin/sh
# Benchmarks: builds a release variant and prints JSON lines. With an older commit as argument, builds that too and runs
# the two in turn, so that the ratios hold on a noisy machine. Without one, the spectrum is timed beside a plain numpy recursion too.
#   ./tests/bench/run.sh [COMMIT]
set -eu
home=$(cd "$(dirname "$0")/../.." && pwd)
. "$home/pipeline/setup.sh"
# shellcheck disable=SC2086
sward_setup $sward_build_packages
SWARD_MATERIALS="$home/pipeline/optics/materials"
export SWARD_MATERIALS
make_bench() { # source, build folder
    cmake -S "$1" -B "$2" -G Ninja -DCMAKE_BUILD_TYPE=Release >/dev/null && cmake --build "$2" --target sward_bench >/dev/null \
        || sward_die "the benchmark does not build in $2"
}
make_bench "$home" "$home/build/bench"
if [ $# -eq 0 ]; then
    cmake --build "$home/build/bench" --target sward_bench_ledger >/dev/null || sward_die "the benchmark of the ledger does not build"
    "$home/build/bench/tests/sward_bench_ledger"
    "$home/build/bench/tests/sward_bench"
    cmake --build "$home/build/bench" --target sward >/dev/null || sward_die "the program does not build"
    "$home/tests/bench/rerun.sh" "$home/build/bench/sward"
    # The same spectrum by a plain recursion in numpy, where that is installed; never fetched for it.
    for python in python3 /usr/bin/python3; do
        "$python" -c 'import numpy' 2>/dev/null || continue
        exec "$python" "$home/tests/bench/recursion.py" "$SWARD_MATERIALS"
    done
    echo "numpy is not installed: no recursion to compare with" >&2
    exit 0
fi
old="$home/build/bench-old"
git -C "$home" worktree prune
[ -d "$old/source" ] && git -C "$home" worktree remove --force "$old/source"
git -C "$home" worktree add --detach "$old/source" "$1" >/dev/null 2>&1 || sward_die "no commit '$1'"
make_bench "$old/source" "$old/build"
for round in 1 2 3; do
    echo "== $1, round $round"; "$old/build/tests/sward_bench"
    echo "== this tree, round $round"; "$home/build/bench/tests/sward_bench"
done
git -C "$home" worktree remove --force "$old/source"
