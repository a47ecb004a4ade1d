#!/bin/sh
# sward compare: a run with itself has no difference, another spacing is real, wrong use is a sentence.
. "$(dirname "$0")/cli.sh"

for spacing in 300 330; do
    mkdir -p "$work/$spacing/wafer"
    "$SWARD" render --out "$work/$spacing/wafer" --spacing $spacing --px 8 >/dev/null 2>&1 || miss "render"
    "$SWARD" run "$work/$spacing" --out "$work/run$spacing" --quiet >/dev/null 2>&1
done
run 0 compare "$work/run300" "$work/run300"
says "$out" "0 of 10 differences" "within sampling" "differences are real at 95 %"
! grep -q " real$" "$out" || miss "a run differs from itself"
run 0 compare "$work/run300" "$work/run330" --json
says "$out" '"quantity": "spacing_nm"' '"real": true' '"notes": ""'
run 0 compare "$work/run300" "$work/run330"
grep -q "spacing_nm .* real$" "$out" || miss "30 nm more spacing is not seen"
run 2 compare "$work/run300"
says "$err" "before and after"
run 2 compare "$work/run300" "$work/300"
says "$err" "no results.json"
run 2 compare a b c
cli_done
