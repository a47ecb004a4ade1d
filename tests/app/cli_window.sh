#!/bin/sh
# The process window from outside: three outputs, the same bytes, samples of a run, every mistake.
. "$(dirname "$0")/cli.sh"

run 0 window --spacing 200:300:50 --height 200:400:50 --target 0.02
says "$out" "# conforms" "For at most 2 %" "at least 29" "with 95 % confidence" "area" "a person decides" "silane"
run 0 window --spacing 200:300:50 --height 200:400:50 --json
says "$out" '"target": 0.02' '"contour": [' '"least_height_nm": ' '"sure_height_nm": ' '"verdict": "fails"' '"caution": "Wet etchants'
cp "$out" "$work/first.json"
run 0 window --spacing 200:300:50 --height 200:400:50 --json
checks=$((checks + 1)); cmp -s "$out" "$work/first.json" || miss "two runs differ"
run 0 window --spacing 200:300:50 --height 200:400:50 --csv
says "$out" "spacing_nm,height_nm,weighted_reflectance,weighted_reflectance_lo,weighted_reflectance_hi,area_ratio,verdict"
checks=$((checks + 1)); [ "$(wc -l <"$out")" -eq 16 ] || miss "15 cells and a header"
run 0 window --exponent 1:2:0.5 --spacing 300 --height 250:350:50 --json
says "$out" '"across": "exponent"' '"exponent": 1.5'
run 0 window --coating nitride:10 --thickness 0:40:20 --height 250:350:50 --csv
says "$out" "thickness_nm,height_nm"
printf '{ "targets": { "weighted_reflectance": { "max": 0.05 } } }' >"$work/p.json"
run 0 window --protocol "$work/p.json" --spacing 300 --height 250:350:50
says "$out" "For at most 5 %"
mkdir -p "$work/results"
printf 'sample,spacing_nm,height_nm,weighted_reflectance,verdict\nW07,251,349,0.0103,undecided\nW08,,,,not_measured\n' >"$work/results/samples.csv"
run 0 window --results "$work/results" --spacing 200:300:50 --height 200:400:50
says "$out" "Today's samples" "A W07: spacing 251 nm, height 349 nm, 1.03 %, undecided; needs at least 29" "At a spacing of 251 nm"
checks=$((checks + 1)); [ "$(grep -c '^ *350 .* A' "$out")" -eq 1 ] || miss "the sample is in its cell"

# Across shape or film the samples stand where their protocol has them, at their own spacing.
run 0 window --results "$work/results" --exponent 1:2:0.5 --height 300:400:50
says "$out" "A W07: spacing 251 nm" "At a spacing of 251 nm and an exponent of 1," "needs at least 3"
checks=$((checks + 1)); [ "$(grep -c '^ *350 *A' "$out")" -eq 1 ] || miss "the sample is in the column of the cone"
run 0 window --results "$work/results" --coating nitride:20 --thickness 0:40:20 --height 300:400:50
says "$out" "At a spacing of 251 nm and a film of 20 nm,"

run 2 window --spacing 300:200:10
says "$err" "--spacing: found 300:200:10"
run 2 window --target 2
says "$err" "--target: found 2"
run 2 window --exponent 1:2:0.5 --thickness 0:10:5
run 2 window --exponent 1:2:0.5 --spacing 200:300:50
says "$err" "expected one spacing"
run 2 window --thickness 0:10:5
says "$err" "needs a coating"
run 2 window --results "$work"
says "$err" "samples.csv: there is no such file"
run 2 window --spacing 100:5000:30 --height 100:5000:30
says "$err" "cells, at most"
run 2 window 300
says "$err" "is no option"
cli_done
