#!/bin/sh
# Every test with one command: installs what is missing, builds with warnings as errors, runs ctest.
#   ./tests/run.sh           all variants: release (gcc), address+undefined sanitizers (gcc), release (clang), thread
#                            sanitizer on the batch (clang)
#   ./tests/run.sh quick     the release variant only
set -eu
home=$(cd "$(dirname "$0")/.." && pwd)
cd "$home"
. pipeline/setup.sh
# shellcheck disable=SC2086
sward_setup $sward_build_packages clang libomp-dev binutils pngcheck poppler-utils libxml2-utils libtiff-tools golang-1.19-src golang-golang-x-image-dev

jobs=$(nproc)
failed=""
variant() { # name, label filter, cmake arguments...
    name=$1; filter=$2; shift 2
    dir="$home/build/test-$name"
    echo "== $name: build"
    mkdir -p "$dir"
    cmake -S "$home" -B "$dir" -G Ninja -DSWARD_WERROR=ON "$@" >"$dir/configure.log" 2>&1 \
        || { tail -n 25 "$dir/configure.log"; sward_die "$name: cmake failed"; }
    cmake --build "$dir" >"$dir/build.log" 2>&1 || { tail -n 40 "$dir/build.log"; sward_die "$name: the build failed"; }
    echo "== $name: test"
    # shellcheck disable=SC2086
    ctest --test-dir "$dir" --output-on-failure -j "$jobs" $filter || failed="$failed $name"
}

variant release "" -DCMAKE_BUILD_TYPE=Release
if [ "${1:-}" != quick ]; then
    variant asan "-LE lint" -DCMAKE_BUILD_TYPE=RelWithDebInfo -DSWARD_SANITIZE=address,undefined
    variant clang "-L quick" -DCMAKE_BUILD_TYPE=Release -DCMAKE_C_COMPILER=clang
    # The OpenMP runtime of clang tells the sanitizer about its barriers through this library.
    OMP_TOOL_LIBRARIES=$(find /usr/lib/llvm-*/lib -name libarcher.so 2>/dev/null | head -n 1)
    TSAN_OPTIONS="ignore_noninstrumented_modules=1"
    export OMP_TOOL_LIBRARIES TSAN_OPTIONS
    variant tsan "-L threads" -DCMAKE_BUILD_TYPE=RelWithDebInfo -DCMAKE_C_COMPILER=clang -DSWARD_SANITIZE=thread
fi
[ -z "$failed" ] || sward_die "tests failed in:$failed"
echo "sward: all tests passed"
