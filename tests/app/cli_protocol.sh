#!/bin/sh
# The printed protocol is a protocol; mistakes have lines; explanations say what stands in the file.
. "$(dirname "$0")/cli.sh"

run 0 protocol print
cp "$out" "$work/built-in.json"
says "$out" '"spacing": "autocorrelation"' '// ' '"band_nm": [300, 1200]'
run 0 protocol check "$work/built-in.json"
says "$out" "is fine"
run 0 protocol explain "$work/built-in.json"
sed 1d "$out" >"$work/from_file"
run 0 protocol explain
sed 1d "$out" >"$work/built_in"
checks=$((checks + 1)); cmp -s "$work/from_file" "$work/built_in" || miss "the printed protocol means something else"

printf '{ "protocol": "line 3, grass etch", "relief": "hillock", "spacing": "autocorrelation",
  "targets": { "spacing_nm": { "min": 280, "max": 420 }, "weighted_reflectance": { "max": 0.02 } },
  "link":    { "height_nm": 350, "height_nm_u": 30, "shape": "cone", "height_spread": 0.15 },
  "optics":  { "ambient": "air", "coatings": [ { "material": "alumina", "thickness_nm": 10 } ], "band_nm": [300, 1200] },
  "history": "line3.sqlite" }\n' >"$work/line3.json"
run 0 protocol check "$work/line3.json"
run 0 protocol explain "$work/line3.json"
says "$out" "line 3, grass etch" "350 +- 30 nm" "spread by 15 %" "10 nm of alumina" "spacing_nm is 280 to 420" "$work/line3.sqlite"

printf '{\n  "link": {\n    "hight_nm": 350\n  }\n}\n' >"$work/typo.json"
run 2 protocol check "$work/typo.json"
says "$err" "typo.json line 3: unknown key 'hight_nm' in link; did you mean 'height_nm'?"
printf '{ "optics": { "substrate": "silcon" } }' >"$work/material.json"
run 2 protocol check "$work/material.json"
says "$err" "unknown material 'silcon', did you mean 'silicon'?"
printf '{ "link": { "profile": "gone.csv" } }' >"$work/profile.json"
run 2 protocol check "$work/profile.json"
says "$err" "$work/gone.csv"
printf '{ "spacing": "density", }' >"$work/comma.json"
run 2 protocol check "$work/comma.json"
: >"$work/empty.json"
run 2 protocol check "$work/empty.json"
run 2 protocol explain "$work/typo.json"
run 2 protocol check "$work/none.json"
run 2 protocol
run 2 protocol check
run 2 protocol print "$work/line3.json"
run 2 protocol explian
run 2 protocol check "$work/line3.json" "$work/typo.json"
cli_done
