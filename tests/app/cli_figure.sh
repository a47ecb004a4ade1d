#!/bin/sh
# sward figure: every kind from one small run, the numbers of its tables, plain colours, and wrong use in sentences.
. "$(dirname "$0")/cli.sh"

mkdir "$work/in"
"$SWARD" render --out "$work/in" --spacing 300 --px 8 >/dev/null 2>&1 || miss "render"
"$SWARD" run "$work/in" --out "$work/run" --quiet >/dev/null 2>&1
code=$?
[ "$code" -eq 0 ] || [ "$code" -eq 3 ] || miss "run ended with $code"
sample=$(sed -n 2p "$work/run/samples.csv" | cut -d, -f1)
for kind in spectra sizes acf history micrograph; do
    run 0 figure $kind --results "$work/run" --sample "$sample" --out "$work/$kind.svg"
    says "$work/$kind.svg" '<?xml version="1.0"' 'xmlns="http://www.w3.org/2000/svg"' '</svg>'
    ! grep -q 'var(' "$work/$kind.svg" || miss "$kind keeps variables"
done
says "$work/spectra.svg" 'wavelength (nm)' 'reflectance (%)' "$sample"
says "$work/sizes.svg" 'cell diameter (nm)'
says "$work/acf.svg" 'distance (nm)' 'stroke-dasharray'
says "$work/micrograph.svg" 'data:image/png;base64,iVBORw0KGgo'
# the point of the history carries the value of samples.csv
spacing=$(sed -n 2p "$work/run/samples.csv" | cut -d, -f"$(sed -n 1p "$work/run/samples.csv" | tr , '\n' | grep -nx spacing_nm | cut -d: -f1)")
says "$work/history.svg" "<title>$sample: $spacing</title>"
run 0 figure history --results "$work/run" --quantity density_per_um2
says "$out" 'density_per_um2 (1/um2)'
run 2 figure history --results "$work/run" --quantity verdict
says "$err" "try spacing_nm"
run 2 figure spectra --results "$work/run" --sample nobody
says "$err" "no sample 'nobody'"
run 2 figure spectra --results "$work/in"
says "$err" "name the output folder"
run 2 figure pie --results "$work/run"
says "$err" "expected spectra"
run 2 figure
run 2 figure sizes --results "$work/run" --out x.jpg
run 1 figure sizes --results "$work/run" --out "$work/no/such/x.svg"
rm -r "$work/run/profiles"
run 1 figure acf --results "$work/run"
printf '{"samples": 1}' >"$work/run/results.json"
run 2 figure acf --results "$work/run"
cli_done
