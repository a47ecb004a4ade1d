#!/bin/sh
# Reflectance from numbers: figures computed from published tables, every option, every mistake.
. "$(dirname "$0")/cli.sh"

# Polished silicon and silicon under 75 nm nitride: Fresnel on M. A. Green (2008), photons of ASTM G173, 300-1200 nm.
run 0 predict --height 0 --json
near weighted_reflectance 0.34984 5e-5
near polished_reflectance 0.34984 5e-5
near coated_reflectance 0.1003 5e-5
near current_loss_mA_cm2 16.25 5e-3
says "$out" '"optics_model": ' '"wavelength_nm": 300,' '"wavelength_nm": 1200,'
checks=$((checks + 1)); [ "$(grep -c wavelength_nm "$out")" -eq 901 ] || miss "the spectrum is on the 1 nm grid"
run 0 predict --height 0 --coating nitride:75 --json
near weighted_reflectance 0.1003 5e-5
# A cone of 300 nm, graded index, two-dimensional Bruggeman: 0.018308, computed independently from the same tables.
run 0 predict --spacing 250 --height 300 --json
near weighted_reflectance 0.0183 5e-5
near current_loss_mA_cm2 0.8505 5e-4
near spacing_nm 250 0
near aspect 1.2 1e-12
says "$out" '"budget": {"height": 0, "shape": 0,' '"note": "'
# A glass against a hand calculation: ((1.5 - 1) / (1.5 + 1))^2 = 0.04 at every wavelength.
run 0 predict --height 0 --substrate 1.5 --json
near weighted_reflectance 0.04 5e-6
# Brewster's angle of n = 1.5, atan(1.5) = 56.3099 degrees: no p light comes back.
run 0 predict --height 0 --substrate 1.5 --angle 56.309932 --polarization p --json
near weighted_reflectance 0 1e-9
run 0 predict --height 0 --ambient 1.5 --substrate 1.5 --json
near weighted_reflectance 0 1e-12

# A profile that is a step is a planar layer: the same as the coating of that index.
printf 'depth_nm,solid_fraction\n0,1\n100,1\n' >"$work/solid.csv"
run 0 predict --profile "$work/solid.csv" --json
near weighted_reflectance 0.34984 5e-5
says "$out" '"spacing_nm": null' '"subwavelength_share": null'

# Every option is heard.
run 0 predict --spacing 300 --height 300 --json
cp "$out" "$work/plain.json"
for option in "--shape paraboloid" "--shape 1.5" "--height-spread 0.2" "--coverage 0.8" "--mixing looyenga" "--coating alumina:10" \
    "--substrate silicon-schinke-2015" "--ambient laminate" "--ambient 1.33" "--angle 40" "--angle 40 --polarization s" \
    "--hemispherical" "--band 350:1100" "--pores" "--height-u 40" "--height 310" "--spacing 310" "--spacing-u 20" "--shape unknown" "--shape-u 0.3" "--flat-top 0.1" \
    "--flat-top-u 0.1" "--tip-radius 20" "--tip-radius-u 20" "--coverage-u 0.1" "--height-spread 0.2 --level tips" "--height-spread-u 0.1" \
    "--height-spread 0.2 --spread-law lognormal"; do
    # shellcheck disable=SC2086
    run 0 predict --spacing 300 --height 300 $option --json
    checks=$((checks + 1)); ! cmp -s "$out" "$work/plain.json" || miss "$option changes nothing"
done
run 0 predict --spacing 300 --height 300 --mixing bruggeman-2d --shape cone --coverage 1 --ambient air --band 300:1200 --angle 0 --polarization mean --json
checks=$((checks + 1)); cmp -s "$out" "$work/plain.json" || miss "the stated defaults are not the defaults"
printf '{ "link": { "height_nm": 300, "exponent_u": 0 } }' >"$work/p.json"
run 0 predict --protocol "$work/p.json" --spacing 300 --json
near weighted_reflectance 0.0183 5e-5

# A cut cone: radius from 0.5 to 1 of the foot's, so half of the full height is gone; its area by hand (frustum and top).
run 0 predict --spacing 300 --height 300 --flat-top 0.25 --json
says "$out" '"shape": {"stated": true, "exponent": 1, "flat_top": 0.25, "height_cut": 0.5, "tip_radius_nm": 0'
near area_ratio "$(awk 'BEGIN { a = 300 * sqrt(sqrt(3) / 2 / 3.14159265358979); print 1.5 * sqrt(300 ^ 2 + (a / 2) ^ 2) / a + 0.25 }')" 1e-3
run 0 predict --spacing 300 --height 300 --tip-radius 20 --coverage 0.9
says "$out" "tips round with a radius of 20 nm"
run 2 predict --spacing 300 --height 300 --tip-radius 20 --flat-top 0.1
says "$err" "flat or round"
run 2 predict --spacing 300 --height 300 --tip-radius 200
says "$err" "leaves no flank on features 300 nm tall"
# A protocol that states the shape knows it; one that does not leaves it open.
printf '{ "link": { "height_nm": 300, "height_nm_u": 0, "shape": "cone" } }' >"$work/cone.json"
printf '{ "link": { "height_nm": 300, "height_nm_u": 0 } }' >"$work/open.json"
run 0 predict --protocol "$work/cone.json" --spacing 250 --json
says "$out" '"budget": {"height": 0, "shape": 0,' '"stated": true'
run 0 predict --protocol "$work/open.json" --spacing 250 --json
says "$out" '"stated": false' "nobody stated"
checks=$((checks + 1)); ! grep -q '"budget": {"height": 0, "shape": 0,' "$out" || miss "an open shape must count"
run 0 predict --spacing 300 --height 300
says "$out" "1.83" "34.98" "10.0" "0.8505 mA/cm2" "aspect 1"
run 0 predict --spacing 300 --height 300 --csv
says "$out" "wavelength_nm,reflectance,reflectance_lo,reflectance_hi"
checks=$((checks + 1)); [ "$(wc -l <"$out")" -eq 902 ] || miss "901 rows and a header"
run 0 predict --materials
says "$out" silicon alumina nitride "M. A. Green"

# Beyond the model there is either no figure or an interval, and always a sentence.
run 0 predict --spacing 3000 --height 300 --json
checks=$((checks + 1)); ! grep -q '"note": ""' "$out" || miss "a coarse texture needs its note"

# Own sun and weight. Polished silicon by energy: 0.364426 (independent). A sun of two far nodes at 600 nm sees R there.
run 0 predict --height 0 --weight energy --json
near weighted_reflectance 0.364426 1e-5
near current_loss_mA_cm2 16.25 5e-3
printf 'wavelength_nm,irradiance_W_m2_nm\n250,0\n599,0\n600,1\n601,0\n1300,0\n' >"$work/lamp.csv"
run 0 predict --height 0 --sun "$work/lamp.csv" --json
near weighted_reflectance 0.35420 1e-4
printf 'wavelength_nm,irradiance_W_m2_nm\n250,0\n200,1\n' >"$work/back.csv"
run 2 predict --height 0 --sun "$work/back.csv"
says "$err" "back.csv" "ascend"
run 2 predict --height 0 --sun "$work/gone.csv"
run 2 predict --height 0 --weight lumen
says "$err" '"photons", "energy"'
# The rear: off by default and said, on: more beyond 1000 nm only.
run 0 predict --height 0 --json
says "$out" '"rear_escape": null'
run 0 predict --spacing 350 --height 350 --json
says "$out" "Front surface only"
run 0 predict --spacing 350 --height 350 --rear 170 --json
says "$out" "returning from the rear of a wafer of 170 um is included"
run 0 predict --spacing 350 --height 350 --rear 170 --band 300:900 --json
near rear_escape 0 1e-5
run 2 predict --height 0 --rear 0
says "$err" "thickness_um (1 to 10000)"
printf '{ "optics": { "rear": { "thickness_um": 180, "rear_reflectance": 1.5 } } }' >"$work/rear.json"
run 2 predict --height 0 --protocol "$work/rear.json"
says "$err" "optics.rear.rear_reflectance: found 1.5, expected a share from 0 to 1"
printf '{ "optics": { "rear": { "thickness_um": 180, "rear_reflectance": 0.9, "lambertian": false } } }' >"$work/rear.json"
run 0 predict --height 0 --protocol "$work/rear.json"
says "$out" "straight double pass" "the rear reflects 90 %"

# Cones of 350 nm against the angle, computed independently: weighted 0.0299, 0.0413, 0.0846, 0.185 at 45, 50, 60, 70 degrees.
run 0 predict --spacing 300 --height 350 --angles 0:70:5 --limit 0.0299 --csv
says "$out" "angle_deg,weighted_reflectance_s,weighted_reflectance_p,weighted_reflectance,weighted_reflectance_lo,weighted_reflectance_hi"
for pair in 45:0.0299 50:0.0413 60:0.0846 70:0.185; do
    at=$(awk -F, -v a="${pair%:*}" '$1 == a { print $4 }' "$out")
    checks=$((checks + 1)); awk -v g="$at" -v w="${pair#*:}" 'BEGIN { exit !(g - w < 3e-4 && w - g < 3e-4) }' || miss "angle $pair: $at"
done
run 0 predict --spacing 300 --height 350 --angles 0:70:5 --limit 0.0299 --json
near angle_under_limit_deg 45 0.1
run 0 predict --spacing 300 --height 350 --angles 0:10:10 --limit 0.0001
says "$out" "Above 0.01 % already at the first angle"
run 2 predict --spacing 300 --height 350 --angles 0:95:5
says "$err" "--angles: found 0:95:5, expected FROM:TO:STEP"
run 2 predict --spacing 300 --height 350 --angles 0:40
run 2 predict --spacing 300 --height 350 --angles 0:40:5 --angle 3
run 2 predict --spacing 300 --height 350 --limit 0.02
says "$err" "--limit: it needs --angles"

# Monte Carlo: repeatable, ranked, beside the interval.
run 0 predict --spacing 300 --height 350 --height-u 30 --trials --json
says "$out" '"monte_carlo": {"median": ' '"seed": 1, "settled": true' '"budget": [{"input": "height", "sd": '
cp "$out" "$work/trials.json"
run 0 predict --spacing 300 --height 350 --height-u 30 --trials --seed 1 --json
checks=$((checks + 1)); cmp -s "$out" "$work/trials.json" || miss "the same seed gives something else"
run 0 predict --spacing 300 --height 350 --height-u 30 --trials --seed 2 --json
checks=$((checks + 1)); ! cmp -s "$out" "$work/trials.json" || miss "another seed changes nothing"
run 0 predict --spacing 300 --height 350 --height-u 30 --trials
says "$out" "Monte Carlo (JCGM 101)" "What contributes         height +- "
run 2 predict --spacing 300 --height 350 --seed 2
says "$err" "--seed: it needs --trials"
run 2 predict --spacing 300 --height 350 --trials --seed 1.5
run 2 predict --spacing 300 --height 0 --trials
says "$err" "--trials: no trials: the surface is planar"
run 2 predict --spacing 300 --height 350 --trials --csv
run 0 predict --spacing 300 --height 350 --shape unknown --coating nitride:20 --trials --tolerance 0.004 --json
says "$out" '{"input": "mixing", "sd": ' '{"input": "coverage", "sd": 0}' '"tolerance": 0.00'
run 2 predict --spacing 300 --height 350 --trials --tolerance 2
says "$err" "--tolerance: found 2, expected"
run 2 predict --spacing 300 --height 350 --tolerance 0.01
says "$err" "--tolerance: it needs --trials"


# Micrometre pyramids go by geometric optics: two bounces leave 0.12703 of bare silicon, 0.02262 under the nitride (Campbell, Green
# 1987 for the geometry, Green 2008 for silicon); the ninth that meets a third facet lowers both a little.
run 0 predict --spacing 5000 --height 3535.5 --json
near weighted_reflectance 0.1255 0.002
near weighted_reflectance_hi 0.14 0.012
says "$out" '"optics_model": "facets"' "Chosen because with a spacing of 5000 nm 100 %"
run 0 predict --spacing 5000 --facet-angle 54.7356 --coating nitride:75 --json
near weighted_reflectance 0.0224 0.0005
says "$out" '"optics_model": "facets"'
# Slanted light and a laminate: rays between the facets; the face of the glass alone gives 4 %.
run 0 predict --spacing 5000 --facet-angle 54.7356 --coating nitride:75 --angles 0:80:20 --limit 0.03
says "$out" "At most 3 % up to" "regular field of pyramids"
run 0 predict --spacing 5000 --facet-angle 54.7356 --coating nitride:75 --ambient laminate --json
near weighted_reflectance 0.05 0.01
says "$out" '"optics_model": "facets"'
run 0 predict --spacing 5000 --height 3535.5 --model graded --json
says "$out" '"optics_model": "none"' '"weighted_reflectance": null' "graded index only"
run 0 predict --spacing 5000 --height 1000 --json
says "$out" '"optics_model": "none"' "flatter than 45 degrees"
run 0 predict --spacing 350 --height 350 --model facets --json
says "$out" '"optics_model": "facets"' '"weighted_reflectance_hi": null' "not large against the waves"
run 2 predict --spacing 350 --height 300 --model rays
says "$err" '--model: found "rays", expected one of "graded", "facets", "auto"'

run 2 predict --spacing 350
says "$err" "--height is missing"
run 2 predict --height 300
says "$err" "--spacing is missing"
run 2 predict --spacing 0 --height 300
says "$err" "--spacing: found 0, expected a number above 0"
run 2 predict --spacing 350 --height -3
says "$err" "--height: found -3"
run 2 predict --spacing 350 --height tall
run 2 predict --spacing 350 --height 300 --coverage 2
says "$err" "--coverage: found 2, expected a number from 0 to 1"
run 2 predict --spacing 350 --height 300 --mixing mean
says "$err" '--mixing: found "mean", expected one of "bruggeman-2d"'
run 2 predict --spacing 350 --height 300 --coating alumina
says "$err" '--coating: found "alumina", expected MATERIAL:NM'
run 2 predict --spacing 350 --height 300 --coating alumna:10
says "$err" "unknown material 'alumna', did you mean 'alumina'?"
run 2 predict --spacing 350 --height 300 --band 1200:300
run 2 predict --spacing 350 --height 300 --band 300-1200
says "$err" "--band: found 300-1200, expected LO:HI in nm"
run 2 predict --spacing 350 --height 300 --ambient 1.33+0.1i
says "$err" "light cannot come from far away in it"
run 2 predict --spacing 350 --height 300 --band 200:1200
says "$err" "200"
run 2 predict --spacing 350 --height 300 --angle 90
run 2 predict --spacing 350 --height 300 --ambient watr
run 2 predict --spacing 350 --height 300 --shape pyramid
run 2 predict 350 300
says "$err" "is no option"
run 2 predict --profile "$work/solid.csv" --height 300
run 2 predict --profile "$work/solid.csv" --coating alumina:10
says "$err" "take the coatings out"
printf 'depth_nm,solid_fraction\n0,0\n100,1.5\n' >"$work/bad.csv"
run 2 predict --profile "$work/bad.csv"
says "$err" "line 3, solid_fraction: found 1.5"
run 2 predict --profile "$work/none.csv"
run 2 predict --protocol "$work/none.json" --spacing 300 --height 300
cli_done
