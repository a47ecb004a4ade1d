#!/bin/sh
# sward inspect: text and JSON, exit codes, facts beside the picture, files that are no pictures, names of any bytes.
set -u
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
cd "$work" || exit 1
passed=0 failed=0
check() { if eval "$2"; then passed=$((passed + 1)); else failed=$((failed + 1)); echo "failed: $1"; fi; }

"$SWARD" render --out r --spacing 300 --px 5 >/dev/null 2>&1 || { echo "failed: render"; exit 1; }
image=$(find r -name '*.png' -o -name '*.tif' | sort | head -1)
"$SWARD" inspect "$image" >text 2>err; code=$?
check "a picture is inspected" '[ $code -eq 0 ] && grep -q "pixel size *5 nm" text && grep -q "info strip *[1-9]" text && grep -q "sha256" text'
"$SWARD" inspect --json "$image" >json 2>err; code=$?
check "JSON has every member" '[ $code -eq 0 ] && for m in file px_nm px_source sources facts strip_px pages width_px height_px bit_depth clipped_low clipped_high compression lossy flags note sha256; do grep -q "\"$m\"" json || exit 1; done'
printf 'not a picture' >x.tif
mkfifo pipe.png
ln -s nowhere.png broken.png
timeout 20 "$SWARD" inspect --json "$image" x.tif pipe.png broken.png >json 2>err; code=$?
check "unreadable files are entries, exit 3, never a wait" '[ $code -eq 3 ] && [ "$(grep -c "\"error\"" json)" -eq 3 ] && [ "$(grep -c "\"px_nm\"" json)" -ge 1 ]'
check "JSON is one array" 'head -1 json | grep -q "^\[$" && tail -1 json | grep -q "^\]$"'
bad=$(printf 'a\033[31m\001b.png')
cp "$image" "$bad"
"$SWARD" inspect --json "$bad" >json 2>err
check "control characters in a name are escaped" 'grep -q "u001b" json && ! grep -q "$(printf "\001")" json'
cp "$image" i.png 2>/dev/null
printf '$CM_MAG 20000\n$CM_ACCEL_VOLT 5.00\n$$SM_MICRON_BAR 100\n$$SM_MICRON_MARKER 700nm\n' >i.txt
"$SWARD" inspect i.png >text 2>err
check "a sidecar is read and the disagreement said" 'grep -q "7 nm (sidecar)" text && grep -q "5 kV" text && grep -q px_sources_disagree text'
"$SWARD" inspect >/dev/null 2>&1; check "no file: wrong use" '[ $? -eq 2 ]'
"$SWARD" inspect --bar 5 "$image" >/dev/null 2>err; code=$?
check "a bar without a unit: wrong use" '[ $code -eq 2 ] && grep -q "5um" err'
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
