#!/bin/sh
# Fitting measured spectra from the outside: the short form, dialects, saving, using the link in run and predict.
. "$(dirname "$0")/cli.sh"
cd "$work" || exit 1

# A spectrum as an instrument would write it: the program's own prediction plus an offset of 0.2 % and a noise of 0.1 %
# (a fixed generator), every 10 nm up to 1000 nm.
spectrum() { # HEIGHT SPACING EXPONENT SEED
    "$SWARD" predict --height "$1" --spacing "$2" --shape "$3" --csv | awk -F, -v s="$4" '
        function u() { s = (s * 16807) % 2147483647; return s / 2147483647 }
        NR > 1 && $1 <= 1000 && $1 % 10 == 0 { r = sqrt(-2 * log(u())) * cos(6.2831853 * u()); printf "%s,%.5f\n", $1, $2 + 0.002 + 0.001 * r }'
}
{ echo wavelength_nm,reflectance; spectrum 246 220 1.3 11; } >W1.csv
{ printf 'Sample;W2\n\nnm;%%R\n'; spectrum 276 260 1.3 12 | awk -F, '{ l = sprintf("%s;%.3f", $1, 100 * $2); sub(/\./, ",", l); print l }' | sort -rn; } >W2.csv
spectrum 330 300 1.3 13 >W3.txt
mkdir results
printf 'sample,spacing_nm,spacing_nm_u,height_nm,height_nm_u,height_source\nW1,220,3,250,10,sheet\nW2,260,4,,,\nW3,300,4,310,,aspect\nW9,,,,,\n' >results/samples.csv
printf 'sample,relief\nW1,hillock\nW2,hillock\nW3,hillock\n' >results/images.csv

run 0 fit --spacing 220 W1.csv
says "$out" "1 spectrum, 71 values" "exponent" "offset" "reduced chi-squared" "height = 1.1" "says nothing of the scatter"
run 0 fit --spacing 220 W1.csv --json
says "$out" '"correlation": [' '"covariance": [' '"remarks": [' '"residual": '
near exponent 1.3 0.04
near offset 0.002 0.0005
near aspect 1.118 0.03354
run 0 fit --spacing 220 --shape 1.3 W1.csv --csv
says "$out" "sample,wavelength_nm,measured,fitted,residual" "W1,300," "W1,1000,"

# Three samples of one run; the same file on every call.
run 0 fit --results results W1.csv W2.csv --sample W3=W3.txt --save link.json --made-at 2026-03-12 --free height,offset --shape 1.3
says "$out" "W2 was read as: percent, decimal comma, descending." "Left out" "the sheet says 250" "Saved to link.json"
cp link.json again.json
run 0 fit --results results W1.csv W2.csv --sample W3=W3.txt --save link.json --made-at 2026-03-12 --free height,offset --shape 1.3
checks=$((checks + 1)); cmp -s link.json again.json || miss "two fits, two files"
says link.json '"format": "sward link"' '"made_at": "2026-03-12"' '"n_samples": 3' '"spacing_hi_nm": 300' '"covariance"'

# The link in use.
printf '{ "link": { "calibration": "link.json", "height_nm": 999 } }' >p.json
run 0 predict --protocol p.json --spacing 280 --json
near height_nm 307.5 8
says "$out" "calibrated on 3 samples of 220 to 300 nm spacing"
run 0 predict --protocol p.json --spacing 380 --json
says "$out" "this sample lies outside"
run 0 predict --protocol p.json --spacing 280 --shape 2 --height 300 --json
near height_nm 300 0
run 0 protocol explain p.json
says "$out" "calibrated link in"
run 0 predict --protocol p.json --spacing 280 --height 300 --json
cp "$out" shaped.json
run 0 predict --spacing 280 --height 300 --shape 1.3 --json
checks=$((checks + 1)); [ "$(grep '"weighted_reflectance"' "$out")" = "$(grep '"weighted_reflectance"' shaped.json)" ] || miss "the shape of the link"

# In a run: height from the link, flag outside its range.
run 0 render --out pictures --pattern hex --spacing 260 --name in
run 0 render --out pictures --pattern hex --spacing 420 --name far
sed 's/, "height_nm": 999//' p.json >pictures/protocol.json
cp link.json pictures/
run 0 run pictures --out run --quiet
says run/samples.csv calibrated outside_calibration
says run/results.json "calibrated on 3 samples"
checks=$((checks + 1)); [ "$(grep -c outside_calibration run/samples.csv)" -eq 1 ] || miss "one sample lies outside"

# What is given is not fitted; what cannot be done is said.
run 0 fit --spacing 220 W1.csv --height 246
says "$out" "exponent" "246"
run 0 fit --band 700:1000 --spacing 220 W1.csv
says "$out" "cannot be told apart by these data"
run 0 fit W1.csv
run 1 fit W1.csv --save x.json
says "$err" "nothing is saved"
checks=$((checks + 1)); [ ! -e x.json ] || miss "a link without spacing was saved"
run 2 fit
run 2 fit W4.csv --spacing 220
says "$err" "W4.csv: there is no such file"
run 2 fit --results results --sample W8=W1.csv
says "$err" "no sample 'W8', did you mean 'W"
run 2 fit --results results --sample W9=W1.csv
says "$err" "no spacing in the results"
run 2 fit --results nowhere W1.csv
says "$err" "holds no samples.csv"
run 2 fit --results results --spacing 220 W1.csv
run 2 fit --spacing 220 W1.csv W1.csv
says "$err" "two spectra of sample 'W1'"
run 2 fit --spacing 220 W1.csv --height 246 --free height
says "$err" "leave one of them out"
run 2 fit --spacing 220 W1.csv --free hight
says "$err" "--free: found 'hight'"
run 2 fit --spacing 220 W1.csv --free offset
says "$err" "W1: the height is neither free nor known"
for option in "--spacing -3" "--spacing 220 --band 300" "--spacing 220 --band 300:320" "--spacing 220 --noise 2" "--spacing 220 --made-at soon" \
    "--spacing 220 --angle 99" "--spacing 220 --ambient glas" "--sample W1" "--spacing 220 --protocol nowhere.json"; do
    # shellcheck disable=SC2086
    run 2 fit W1.csv $option
done
printf 'nm,R\n400,0.1\n450,0.1\n500,oops\n' >bad.csv
run 2 fit --spacing 220 bad.csv
says "$err" "bad.csv line 4: found 'oops', expected a reflectance"
printf '{ "link": { "calibration": "results/samples.csv" } }' >q.json
run 2 predict --protocol q.json --spacing 280
printf 'nm,R\n400,0.1\n450,0.1\n' >"$work/two.csv"
run 2 fit --spacing 220 --flat-top 0.1 --save "$work/x.json" "$work/two.csv"
says "$err" "--flat-top: a link file does not carry it"
cli_done
