#!/bin/sh
# What a run takes from a folder and what it leaves alone: order, temporary and growing files, pixel window, page, limits,
# names that do not match the pattern. Dry run and run say the same.
. "$(dirname "$0")/cli.sh"
cd "$work" || exit 1
picture() { # name, px, seed
    "$SWARD" render --out r --name x --spacing "$((20 * $2))" --px "$2" --size 480x360 --seed "$3" --no-strip >/dev/null 2>&1 || exit 1
    mv r/x*.png "$1"; rm -rf r
}
# holds FILE REGEX: a line of it matches
holds() { checks=$((checks + 1)); grep -q "$2" "$1" || { miss "no line of $1 matches $2:"; head -n 20 "$1"; }; }

# dry CODE ARGUMENTS...: ends with CODE; what it has to say stands on stdout
dry() {
    want=$1; shift
    checks=$((checks + 1))
    "$SWARD" "$@" >"$out" 2>"$err" </dev/null
    got=$?
    [ "$got" -eq "$want" ] && [ ! -s "$err" ] || { miss "exit $got, wanted $want: sward $*"; cat "$err"; }
}

mkdir in in/old
picture in/L7_W2_centre_50k_10.png 5 1
picture in/L7_W2_centre_50k_9.png 5 2
picture in/L7_W2_centre_1k_1.png 300 3
picture in/other.png 5 4
cp in/other.png in/.hidden.png
cp in/other.png 'in/~$other.png'
cp in/other.png in/other.png.part
cp in/other.png outside.png
cp in/other.png in/old/x.png
echo '{ "name": "sward-results" }' >in/old/datapackage.json
ln -s ../outside.png in/link.png
cat >in/protocol.json <<'J'
{ "name_pattern": "{lot}_W{wafer}_{position}_{magnification}_{image}", "measure_between_px_nm": [2, 12],
  "limits": { "max_megapixels": 0.5, "max_file_mb": 20, "max_memory_mb": 100 }, "keep_tilt": true }
J
dry 3 run in --dry-run
cp "$out" dry
says dry "L7_W2_centre" "outside_px_window" "name_unmatched"
"$SWARD" run in --out res --verbose >text 2>err </dev/null; got=$?
checks=$((checks + 1)); [ $got -eq 3 ] || miss "an overview is an input that is not used"
for name in .hidden.png '~$other.png' other.png.part link.png old protocol.json; do says err "left alone: $name ("; done
says err "(hidden)" "(a temporary file by its name)" "(a link that leads out of the folder)" "(results of an earlier run)" "(no picture by its name)"
holds res/images.csv '^L7_W2_centre_1k_1.png,L7_W2_centre,excluded,outside_px_window,[^,]*,300,'
holds res/images.csv '^other.png,other,ok,,[^,]*name_unmatched'
holds res/samples.csv '^L7_W2_centre,L7,2,centre,[^,]*,3,2,'
checks=$((checks + 1)) # 9 before 10
[ "$(cut -d, -f1 res/images.csv | sed -n 's/L7_W2_centre_50k_//p' | tr '\n' ' ')" = "9.png 10.png " ] || miss "natural order"
checks=$((checks + 1))
[ ! -e res/overlays/L7_W2_centre_1k_1.png ] && [ -e res/overlays/other.png ] || miss "no overlay of what was not measured"

# A file that grows while the folder is looked at: half a micrograph is left alone and said.
mkdir grow
cp in/other.png grow/whole.png
( i=0; while [ $i -lt 60 ]; do head -c 500 in/other.png >>grow/half.png; sleep 0.05; i=$((i + 1)); done ) &
writer=$!
sleep 0.2
"$SWARD" run grow --dry-run >text 2>err
kill $writer 2>/dev/null; wait $writer 2>/dev/null
holds text '^half.png: left alone, still being written'
holds text '^whole.png '

# Limits refuse before they take memory, and the batch goes on.
echo '{ "limits": { "max_megapixels": 0.1 } }' >small.json
dry 3 run in --dry-run --protocol small.json
says "$out" "too large"
echo '{ "limits": { "max_file_mb": 0.01 } }' >small.json
dry 3 run in --dry-run --protocol small.json
says "$out" "more than the limit"
echo '{ "limits": { "max_memory_mb": 1 } }' >small.json
dry 3 run in --dry-run --protocol small.json
says "$out" "too large"
echo '{ "page": 1.5 }' >bad.json
run 2 protocol check bad.json
says "$err" "whole number"
echo '{ "measure_between_px_nm": [12, 2] }' >bad.json
run 2 protocol check bad.json
run 0 protocol explain in/protocol.json
says "$out" "from 2 to 12 nm are measured" "flagged, not stretched"
cli_done
