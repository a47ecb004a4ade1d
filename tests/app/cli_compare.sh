#!/bin/sh
# sward compare: a run with itself has no difference, another spacing is real, wrong use is a sentence.
. "$(dirname "$0")/cli.sh"

for spacing in 300 330; do
    mkdir -p "$work/$spacing/wafer"
    "$SWARD" render --out "$work/$spacing/wafer" --spacing $spacing --px 8 >/dev/null 2>&1 || miss "render"
    "$SWARD" run "$work/$spacing" --out "$work/run$spacing" --quiet >/dev/null 2>&1
done
run 0 compare "$work/run300" "$work/run300"
says "$out" "0 of 10 differences" "unchanged" "differences are real at 95 %" "1 of 1 samples rest on the same micrographs"
! grep -q " real$" "$out" || miss "a run differs from itself"
run 0 compare "$work/run300" "$work/run330" --json
says "$out" '"quantity": "spacing_nm"' '"real": true' '"notes": ""'
run 0 compare "$work/run300" "$work/run330"
grep -q "spacing_nm .* real$" "$out" || miss "30 nm more spacing is not seen"
# Another protocol on the same pictures: sampling cancels, so that any change is the protocol's.
echo '{ "link": { "height_nm": 350 } }' >"$work/other.json"
"$SWARD" run "$work/300" --protocol "$work/other.json" --out "$work/runother" --quiet >/dev/null 2>&1
run 0 compare "$work/run300" "$work/runother"
grep -q "spacing_nm .* unchanged$" "$out" || miss "the same pictures give another spacing"
grep -q "weighted_reflectance .* real, same micrographs$" "$out" || miss "another height of the protocol is not seen"
run 2 compare "$work/run300"
says "$err" "before and after"
run 2 compare "$work/run300" "$work/300"
says "$err" "no results.json"
run 2 compare a b c
cli_done
