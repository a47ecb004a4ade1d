#!/bin/sh
# sward scale on a grid written here byte by byte; the scale file in measure and run; --dry-run.
set -u
LC_ALL=C
export LC_ALL
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
cd "$work" || exit 1
passed=0 failed=0
check() { if eval "$2"; then passed=$((passed + 1)); else failed=$((failed + 1)); echo "failed: $1"; fi; }
number() { sed -n "s/.*\"$1\": \([-0-9.e+]*\).*/\1/p" "$2" | head -1; }

# Grey 8-bit TIFF, 400 x 400, 5e6 pixels per cm = 2 nm nominal; a square grid of 25 px, turned by atan(3/4): its waves
# have periods of 25 px along (0.8, 0.6) and (-0.6, 0.8).
n=400
{
    printf 'II*\000\010\000\000\000\013\000'
    printf '\000\001\004\000\001\000\000\000\220\001\000\000'             # width
    printf '\001\001\004\000\001\000\000\000\220\001\000\000'             # length
    printf '\002\001\003\000\001\000\000\000\010\000\000\000'             # bits
    printf '\003\001\003\000\001\000\000\000\001\000\000\000'             # compression
    printf '\006\001\003\000\001\000\000\000\001\000\000\000'             # photometric
    printf '\021\001\004\000\001\000\000\000\242\000\000\000'             # strip offset 162
    printf '\025\001\003\000\001\000\000\000\001\000\000\000'             # samples
    printf '\026\001\004\000\001\000\000\000\220\001\000\000'             # rows per strip
    printf '\027\001\004\000\001\000\000\000\000\161\002\000'             # strip bytes 160000
    printf '\032\001\005\000\001\000\000\000\222\000\000\000'             # x resolution at 146
    printf '\050\001\003\000\001\000\000\000\003\000\000\000'             # centimetre
    printf '\000\000\000\000'
    printf '\100\113\114\000\001\000\000\000'                             # 5 000 000 / 1
    printf '\000\000\000\000\000\000\000\000'
    awk -v n=$n 'BEGIN { k = 6.283185307179586 / 25; for (y = 0; y < n; y++) for (x = 0; x < n; x++)
        printf "%c", int(128 + 30 * cos(k * (0.8 * x + 0.6 * y)) + 30 * cos(k * (0.8 * y - 0.6 * x)) + 0.5) }'
} >grid.tif
"$SWARD" scale grid.tif --pitch 51nm --pitch-u 0.1nm --save s.json --name "grid 7" --date 2026-02-03 >text 2>err; code=$?
check "a grid is measured" '[ $code -eq 0 ] && grep -q "square lattice" text && [ -s s.json ]'
check "its pixel is 51 / 25 nm within 0.05 %" 'awk -v x="$(number px_x_nm s.json)" -v y="$(number px_y_nm s.json)" "BEGIN { exit !(x > 2.039 && x < 2.041 && y > 2.039 && y < 2.041) }"'
check "the certificate counts" 'awk -v u="$(number px_u_rel s.json)" "BEGIN { exit !(u > 0.00195 && u < 0.003) }"'
"$SWARD" scale grid.tif >/dev/null 2>err; check "no pitch: wrong use" '[ $? -eq 2 ]'
"$SWARD" scale grid.tif --pitch 51 >/dev/null 2>err; check "a pitch without a unit: wrong use" '[ $? -eq 2 ]'
"$SWARD" scale nowhere.tif --pitch 51nm >/dev/null 2>err; check "no such file: wrong use" '[ $? -eq 2 ] && grep -q nowhere err'
mkdir folder
"$SWARD" render --out folder --spacing 60 --px 2 >/dev/null 2>&1
rm -f folder/truth.json
"$SWARD" render --out other --spacing 60 --px 3 >/dev/null 2>&1
mv other/render_001.png folder/other_L2_4.png
"$SWARD" scale folder/render_001.png --pitch 51nm >/dev/null 2>err; check "a texture is no standard: 3" '[ $? -eq 3 ]'
"$SWARD" run folder --scale s.json --out out --quiet --no-report >/dev/null 2>err; code=$?
check "a run applies it where the nominal pixel size is the same" '[ $code -eq 0 ] && grep "^render_001" out/images.csv | grep -q ",standard,"'
check "and leaves others alone" 'grep "^other_L2_4" out/images.csv | grep -q ",pHYs,"'
check "results name the standard and its date" 'grep -q "grid 7" out/results.json && grep -q "2026-02-03" out/results.json'
echo '{ "scale": "s.json" }' >folder/protocol.json
cp s.json folder/
"$SWARD" run folder --out out2 --quiet --no-report >/dev/null 2>err
check "the protocol can name it" 'grep "^render_001" out2/images.csv | grep -q ",standard,"'
sed "s/\"px_x_nm\": [0-9.]*/\"px_x_nm\": -1/" s.json >bad.json
"$SWARD" run folder --scale bad.json --out out3 >/dev/null 2>err; check "a broken scale file is named with its line" '[ $? -eq 2 ] && grep -q "bad.json line 4" err && [ ! -e out3 ]'
printf 'file,sample,position\nrender_001.png,W1,centre\n' >folder/samples.csv
echo x >folder/broken.png
"$SWARD" run folder --dry-run --out out4 >text 2>err; code=$?
check "a dry run says sample, position, pixel size, source and writes nothing" '[ $code -eq 3 ] && [ ! -e out4 ] && grep -q "^render_001.png *W1 *centre .* nm  standard" text && grep -q "^other_L2_4.png .* 3 nm  pHYs" text && grep -q "^broken.png .*unreadable" text'
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
