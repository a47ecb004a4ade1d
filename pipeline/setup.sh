# Sourced by pipeline/run.sh and tests/run.sh: installs the Debian packages that are missing, saying so first.
# Use: . pipeline/setup.sh; sward_setup PACKAGE...
# Idempotent: with everything there it does nothing and needs neither network nor root.

sward_build_packages="gcc libc6-dev cmake ninja-build pkg-config libpng-dev libtiff-dev libjpeg62-turbo-dev libexpat1-dev libpcre2-dev libfftw3-dev libcjson-dev libsqlite3-dev libcminpack-dev libjs-chart.js libcairo2-dev libfreetype-dev fonts-dejavu-core"

sward_die() {
    echo "sward: $*" >&2
    exit 1
}

sward_setup() {
    command -v dpkg-query >/dev/null 2>&1 || sward_die "this set-up knows Debian 12 only: install these packages by hand, then call cmake yourself: $*"
    missing=""
    for package in "$@"; do
        [ "$(dpkg-query -W -f '${db:Status-Status}' "$package" 2>/dev/null)" = installed ] || missing="$missing $package"
    done
    [ -n "$missing" ] || return 0
    as_root=""
    if [ "$(id -u)" -ne 0 ]; then
        command -v sudo >/dev/null 2>&1 || sward_die "missing:$missing. Run as root, or install sudo, or ask an administrator to install them"
        as_root="sudo"
    fi
    echo "sward: installing these Debian packages:$missing"
    $as_root apt-get update -qq || sward_die "apt-get update failed; is the network there?"
    # shellcheck disable=SC2086
    $as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends $missing >/dev/null \
        || sward_die "apt-get could not install:$missing"
}
