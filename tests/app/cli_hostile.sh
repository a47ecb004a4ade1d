#!/bin/sh
# A folder full of traps: every file that is named like an image gets a row that says why it cannot be used, the good one
# is measured, nothing waits and nothing is left out.
set -u
LC_ALL=C
export LC_ALL
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
cd "$work" || exit 1
passed=0 failed=0
check() { if eval "$2"; then passed=$((passed + 1)); else failed=$((failed + 1)); echo "failed: $1"; fi; }
status_of() { grep "^$1," out/images.csv | head -1 | cut -d, -f3; }

mkdir in
"$SWARD" render --out r --spacing 100 --px 5 >/dev/null 2>&1
cp r/render_001.png in/good.png
mkfifo in/pipe.png
ln -s nowhere.tif in/broken.tif
ln -s loop.png in/loop.png
: >in/empty.jpg
printf 'II*\000\010\000\000\000' >in/cut.tif
# A directory that names itself as the next one.
printf 'II*\000\010\000\000\000\001\000\000\001\004\000\001\000\000\000\144\000\000\000\010\000\000\000' >in/cycle.tif
# 60000 x 60000 pixels claimed in a few bytes.
{
    printf 'II*\000\010\000\000\000\007\000'
    printf '\000\001\004\000\001\000\000\000\140\352\000\000\001\001\004\000\001\000\000\000\140\352\000\000'
    printf '\002\001\003\000\001\000\000\000\010\000\000\000\003\001\003\000\001\000\000\000\005\000\000\000'
    printf '\006\001\003\000\001\000\000\000\001\000\000\000\021\001\004\000\001\000\000\000\000\001\000\000'
    printf '\027\001\004\000\001\000\000\000\144\000\000\000\000\000\000\000'
    head -c 400 /dev/zero
} >in/bomb.tif
head -c 3000 in/good.png >in/half.png
printf 'GIF89a' >in/x.gif
cp r/render_001.png "in/$(printf 'esc\033[2Japed.png')"
cp r/render_001.png "in/$(printf 'new\nline.png')"
cp r/render_001.png "in/$(printf 'bytes\377\376.png')"
timeout 120 "$SWARD" run in --out out --quiet >text 2>err; code=$?
check "the run ends with 3" '[ $code -eq 3 ]'
check "the good one is used" '[ "$(status_of good.png)" = ok ]'
for f in pipe.png broken.tif loop.png empty.jpg cut.tif cycle.tif bomb.tif half.png x.gif; do
    check "$f has its row and reason" '[ "$(status_of $f)" = unreadable ] && grep "^$f," out/images.csv | cut -d, -f4- | grep -q "[a-z]"'
done
check "names of any bytes have rows in the JSON" 'grep -q "esc.u001b" out/results.json && grep -q "new.nline.png" out/results.json && grep -q "bytes" out/results.json'
check "no raw escape reaches the terminal or the page" '! grep -q "$(printf "\033")" text err out/report.html out/results.json'
timeout 60 "$SWARD" run in --dry-run >text 2>err
check "a dry run neither waits nor obeys names" '[ $? -eq 3 ] && ! grep -q "$(printf "\033")" text && grep -q "^pipe.png .*not a regular file" text'
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
