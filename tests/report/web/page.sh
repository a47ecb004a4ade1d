#!/bin/sh
# page.sh SWARD IMAGES: makes a report of the sample folder and looks at it in a browser (page.js). Skipped, saying why, where
# node, a Chromium or the two npm packages are missing; SWARD_WEB_INSTALL=1 installs the packages first.
set -eu
sward=$1
images=$2
here=$(cd "$(dirname "$0")" && pwd)
skip() {
    echo "skipped: $*"
    exit 77
}
command -v node >/dev/null 2>&1 || skip "no node"
browser=$(command -v chromium || command -v chromium-browser || command -v google-chrome) || skip "no Chromium"
if [ ! -d "$here/node_modules" ] && [ "${SWARD_WEB_INSTALL:-0}" = 1 ]; then
    (cd "$here" && npm install --no-audit --no-fund --silent) || skip "npm could not install the packages"
fi
[ -d "$here/node_modules" ] || skip "no node_modules in tests/report/web; SWARD_WEB_INSTALL=1 installs them"
out=$(mktemp -d)
trap 'rm -rf "$out"' EXIT
code=0
"$sward" run "$images" --out "$out" --quiet || code=$?
[ "$code" = 0 ] || [ "$code" = 3 ] || { echo "run failed with $code"; exit 1; }
node "$here/page.js" "$out/report.html" "$browser"
