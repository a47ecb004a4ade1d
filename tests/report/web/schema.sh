#!/bin/sh
# schema.sh SWARD IMAGES: validates the outputs of a run against their schemas (schema.js). Skipped, saying why, where node or the
# npm packages are missing; SWARD_WEB_INSTALL=1 installs them first.
set -eu
sward=$1
images=$2
here=$(cd "$(dirname "$0")" && pwd)
. "$here/packages.sh"
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
code=0
"$sward" run "$images" --out "$work/out" --no-report --quiet >/dev/null || code=$?
[ "$code" = 0 ] || [ "$code" = 3 ] || { echo "run failed with $code"; exit 1; }
node "$here/schema.js" "$work/out"
