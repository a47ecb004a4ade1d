#!/bin/sh
# page.sh SWARD IMAGES: makes a report of the sample folder and looks at it in a browser (page.js). Skipped, saying why, where
# node, a Chromium or the npm packages are missing; SWARD_WEB_INSTALL=1 installs the packages first.
set -eu
sward=$1
images=$2
here=$(cd "$(dirname "$0")" && pwd)
. "$here/packages.sh"
browser=$(command -v chromium || command -v chromium-browser || command -v google-chrome) || skip "no Chromium"
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
run() {
    code=0
    "$sward" run "$@" --quiet >/dev/null || code=$?
    [ "$code" = 0 ] || [ "$code" = 3 ] || { echo "run failed with $code"; exit 1; }
}
run "$images" --out "$work/out"

# The same picture under names that try to become part of the page.
mkdir "$work/strange"
picture=$(find "$images" -name '*.png' | sort | head -n 1)
cp "$picture" "$work/strange/<img src=x onerror=alert(1)>.png"
cp "$picture" "$work/strange/a\"'&\`\${b}.png"
cat >"$work/strange/samples.csv" <<'CSV'
file,sample,lot,wafer,px_nm
<img src=x onerror=alert(1)>.png,</script><script>document.title='owned'</script>,<svg onload=alert(2)>,--><script>alert(3)</script>,4
CSV
run "$work/strange" --out "$work/strange-out"
node "$here/page.js" "$work/out" "$work/strange-out" "$browser"
