#!/bin/sh
# sward figure: every kind in every format from one small run, the numbers of its tables, the same bytes twice, hostile names inert, and
# wrong use in sentences.
. "$(dirname "$0")/cli.sh"

mkdir "$work/in" "$work/other"
"$SWARD" render --out "$work/in" --spacing 300 --px 8 >/dev/null 2>&1 || miss "render"
printf 'file,sample,lot,wafer,x_mm,y_mm\n%s,A1,L1,W1,10,-20\n' "$(basename "$work"/in/*.png)" >"$work/in/samples.csv"
"$SWARD" run "$work/in" --out "$work/run" --quiet >/dev/null 2>&1
code=$?
[ "$code" -eq 0 ] || [ "$code" -eq 3 ] || miss "run ended with $code"
sample=$(sed -n 2p "$work/run/samples.csv" | cut -d, -f1)
"$SWARD" window --results "$work/run" --spacing 250:350:50 --height 200:400:100 --json >"$work/window.json" || miss "window"
"$SWARD" predict --spacing 300 --height 350 --angles 0:80:20 --json >"$work/angles.json" || miss "angles"

# figure KIND FORMAT: with what the kind needs
figure() {
    case $1 in
        window|angles) run 0 figure "$1" --results "$work/run" --data "$work/$1.json" --out "$work/$1.$2" ;;
        history|wafer) run 0 figure "$1" --run "$work/run" --out "$work/$1.$2" ;;
        *) run 0 figure "$1" --results "$work/run" --samples "$sample" --overlay --width 120 --out "$work/$1.$2" ;;
    esac
}
kinds="spectra distribution autocorrelation psd angles window history wafer micrograph"
for kind in $kinds; do
    for format in svg pdf png; do
        figure "$kind" "$format"
        mv "$work/$kind.$format" "$work/other/"
        figure "$kind" "$format"
        checks=$((checks + 1))
        cmp -s "$work/$kind.$format" "$work/other/$kind.$format" || miss "$kind.$format differs the second time"
    done
    says "$work/$kind.svg" '<?xml version="1.0"' 'xmlns="http://www.w3.org/2000/svg"' '<title>' '<desc>' '</svg>'
    ! grep -q 'http' "$work/$kind.svg" || ! grep -o 'http[^"]*' "$work/$kind.svg" | grep -qv 'www.w3.org' || miss "$kind.svg points elsewhere"
    ! grep -aq CreationDate "$work/$kind.pdf" || miss "$kind.pdf carries a time"
done
says "$work/spectra.svg" 'wavelength (nm)' 'reflectance (%)' "$sample"
says "$work/distribution.svg" 'diameter of the cells (nm)' 'D50'
says "$work/history.svg" 'spacing (nm)'
says "$work/micrograph.svg" 'data:image/png;base64,iVBORw0KGgo'

# the spacing in the legend is that of images.csv, digit for digit
column() { sed -n 1p "$1" | tr , '\n' | grep -nx "$2" | cut -d: -f1; }
spacing=$(sed -n 2p "$work/run/images.csv" | cut -d, -f"$(column "$work/run/images.csv" spacing_acf_nm)")
says "$work/autocorrelation.svg" "spacing $spacing nm"
says "$work/micrograph.svg" "spacing $spacing nm"

# other readers: the files are whole, the letters are in the PDF
if command -v pngcheck >/dev/null; then
    for kind in $kinds; do pngcheck -q "$work/$kind.png" >"$out" 2>&1 || { miss "pngcheck: $kind"; cat "$out"; }; done
else echo "skipped: pngcheck is not installed"; fi
if command -v xmllint >/dev/null; then
    for kind in $kinds; do xmllint --noout "$work/$kind.svg" 2>"$err" || { miss "xmllint: $kind"; cat "$err"; }; done
else echo "skipped: xmllint is not installed"; fi
if command -v pdffonts >/dev/null && command -v pdftotext >/dev/null; then
    for kind in $kinds; do
        checks=$((checks + 1)) # every font embedded: "emb" is the fifth column from the right
        pdffonts "$work/$kind.pdf" 2>/dev/null | tail -n +3 | awk '{ n++; if ($(NF - 4) != "yes") bad = 1 } END { exit bad || !n }' || miss "$kind.pdf lacks a font"
    done
    pdftotext "$work/spectra.pdf" "$out" && says "$out" "wavelength (nm)" "$sample"
    pdftotext "$work/autocorrelation.pdf" "$out" && says "$out" "spacing $spacing nm"
else echo "skipped: poppler-utils is not installed"; fi

# sizes: 120 mm at 100 dots per inch; a hostile sample name stays text
run 0 figure spectra --results "$work/run" --out "$work/a.png" --width 120 --height 60 --dpi 100 --text 9 --dark --title
checks=$((checks + 1))
[ "$(od -An -tu1 -j16 -N8 "$work/a.png" | tr -s ' ')" = " 0 0 1 217 0 0 0 237" ] || miss "a.png is not 473 x 237"
cp -r "$work/run" "$work/hostile"
sed "s|\"$sample\"|\"<script>alert(1)</script>\\&\\\\u0007 $(printf '\346\274\242')$(printf 'x%.0s' $(seq 400))\"|g" "$work/run/results.json" >"$work/hostile/results.json"
for format in svg pdf png; do run 0 figure spectra --results "$work/hostile" --out "$work/h.$format"; done
says "$work/h.svg" '&lt;script&gt;'
! grep -q '<script' "$work/h.svg" || miss "a script in the SVG"

run 0 figure acf --results "$work/run"
says "$out" '</svg>'
run 2 figure history --results "$work/run" --quantity verdict
says "$err" "no chart of 'verdict'; it has: spacing_nm"
sed 's/"places": \[/"nowhere": [/' "$work/run/results.json" >"$work/other/results.json"
run 2 figure wafer --results "$work/other"
says "$err" "x_mm and y_mm"
run 0 figure window --results "$work/run"
says "$out" 'height (nm)'
run 0 figure angles --results "$work/run"
says "$out" 'polished silicon'
run 2 figure wafer --results "$work/run" --quantity verdict
says "$err" "try spacing_nm"
run 2 figure spectra --results "$work/run" --sample nobody
says "$err" "no sample 'nobody'"
run 2 figure spectra --results "$work/in"
says "$err" "name the output folder"
run 2 figure pie --results "$work/run"
says "$err" "expected spectra"
run 2 figure
run 2 figure sizes --results "$work/run" --out x.jpg
run 2 figure sizes --results "$work/run" --width 5
says "$err" "20 to 1000 mm wide"
run 2 figure sizes --results "$work/run" --width x
run 2 figure window --results "$work/run" --data "$work/nothing.json"
echo '[' >"$work/broken.json"
run 2 figure window --results "$work/run" --data "$work/broken.json"
says "$err" "is no JSON"
echo '{"cells": [{"spacing_nm": 1}, {"spacing_nm": 2}, {"spacing_nm": 1}]}' >"$work/broken.json"
run 2 figure window --results "$work/run" --data "$work/broken.json"
says "$err" "no grid"
run 2 figure angles --results "$work/run" --data "$work/broken.json"
says "$err" "no angles"
run 1 figure sizes --results "$work/run" --out "$work/no/such/x.svg"
mv "$work/in" "$work/moved"
run 2 figure micrograph --results "$work/run" --sample "$sample"
says "$err" "--folder"
run 0 figure micrograph --results "$work/run" --sample "$sample" --folder "$work/moved" --out "$work/m.png"
for f in "$work"/moved/*.png; do printf 'x' >>"$f"; done
run 2 figure micrograph --results "$work/run" --sample "$sample" --folder "$work/moved"
says "$err" "no longer the file"
rm -r "$work/run/profiles"
run 1 figure acf --results "$work/run"
printf '{"samples": 1}' >"$work/run/results.json"
run 2 figure acf --results "$work/run"
cli_done
