#!/bin/sh
# sward repeat: places, operators and sessions of the sheet, text and JSON, exit codes.
set -u
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
cd "$work" || exit 1
passed=0 failed=0
check() { if eval "$2"; then passed=$((passed + 1)); else failed=$((failed + 1)); echo "failed: $1"; fi; }

cat >recipe.json <<'END'
{ "defaults": { "px_nm": 12, "size": "400x300", "noise": 300, "strip": false },
  "images": [ { "file": "a1.png", "seed": 1, "spacing_nm": 300 }, { "file": "a2.png", "seed": 2, "spacing_nm": 300 },
              { "file": "a3.png", "seed": 3, "spacing_nm": 300 }, { "file": "b1.png", "seed": 4, "spacing_nm": 330 },
              { "file": "b2.png", "seed": 5, "spacing_nm": 330 }, { "file": "b3.png", "seed": 6, "spacing_nm": 330 } ] }
END
"$SWARD" render --recipe recipe.json --out r >/dev/null 2>&1 || { echo "failed: render"; exit 1; }
printf 'file,place,operator,session\na1.png,centre,Ada,1\na2.png,centre,Ada,1\na3.png,centre,Max,1\nb1.png,edge,Ada,2\nb2.png,edge,Ada,2\nb3.png,edge,Max,2\n' >r/samples.csv
printf '{ "targets": { "spacing_nm": { "min": 250, "max": 400 } } }\n' >r/protocol.json
"$SWARD" repeat r >text 2>err; code=$?
check "two places, two operators" '[ $code -eq 0 ] && grep -q "spacing_acf_nm: mean .* of 6 micrographs, 2 places" text && grep -q "^  between operators" text && grep -q "^  reproducibility  *[0-9]" text'
check "the target gives the width" 'grep -q "of the target.s width, index" text'
check "nothing is written" '[ ! -e sward-out ] && [ ! -e r/sward-out ]'
"$SWARD" repeat r --json --quantity spacing_hex_nm >json 2>err; code=$?
check "JSON of one quantity" '[ $code -eq 0 ] && grep -q "\"quantity\": \"spacing_hex_nm\"" json && grep -q "\"dof_repeatability\": 2," json && grep -q "\"places\": 2, \"groups\": 4" json && ! grep -q spacing_acf json'
"$SWARD" repeat r --json --jobs 1 >one 2>/dev/null; "$SWARD" repeat r --json --jobs 2 >two 2>/dev/null
check "same bytes at any number of workers" 'cmp -s one two && [ -s one ]'
cp r/a1.png r/copy.png
printf 'no picture' >r/x.tif
"$SWARD" repeat r >text 2>err; code=$?
check "a copy and a file that is no picture do not count, exit 3" '[ $code -eq 3 ] && grep -q "of 6 micrographs" text'
"$SWARD" repeat r --quantity spacing_hex >out 2>err; code=$?
check "an unknown quantity names the nearest" '[ $code -eq 2 ] && grep -q "did you mean .spacing_hex_nm" err'
mkdir none lone; cp r/a1.png lone
"$SWARD" repeat lone >out 2>err; check "one micrograph is too few" '[ $? -eq 2 ] && grep -q "expected at least 2" err'
"$SWARD" repeat none >out 2>err; check "no micrograph" '[ $? -eq 2 ] && grep -q "holds no micrograph" err'
"$SWARD" repeat nowhere >out 2>err; check "no folder" '[ $? -eq 2 ] && grep -q "is no folder" err'
"$SWARD" repeat >out 2>err; check "FOLDER is missing" '[ $? -eq 2 ] && grep -q "FOLDER is missing" err'
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
