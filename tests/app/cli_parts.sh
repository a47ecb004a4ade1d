#!/bin/sh
# A run divided by --part and joined by gather is the run, byte for byte; parts that do not belong together are refused.
. "$(dirname "$0")/cli.sh"

# ends CODE ARGUMENTS...: like run, for the codes that come with results.
ends() { want=$1; shift; checks=$((checks + 1)); "$SWARD" "$@" >"$out" 2>"$err"; got=$?; [ "$got" -eq "$want" ] || miss "exit $got, wanted $want: sward $*"; }

run 0 render --out "$work/in" --count 5 --size 320x240 --spacing 120
mkdir "$work/in/sub"
mv "$work/in/render_003.png" "$work/in/sub/other_2.png"
printf 'file,sample,lot,height_nm,height_nm_u,chamber\nrender_001.png,S1,L,110,9,north\nrender_004.png,S1,L,110,9,north\n' >"$work/in/samples.csv"
printf '{ "protocol": "parts", "targets": { "spacing_nm": { "min": 100, "max": 140 } } }\n' >"$work/in/protocol.json"
printf 'no picture' >"$work/in/broken.png"

ends 3 run "$work/in" --out "$work/whole"
for k in 3 1 2; do
    (cd "$work" && "$SWARD" run in --part "$k/3" --out "p$k" >"$out" 2>"$err")
    says "$out" "Part $k of 3" "sward gather"
done
ends 3 gather "$work/p2" "$work/p3" "$work/p1" --out "$work/joined" # five good pictures, the broken one is said
says "$out" "5 measured, 0 excluded, 1 unreadable"
checks=$((checks + 1))
diff -r -x run.json -x history.sqlite -x cache "$work/whole" "$work/joined" || miss "joined is not whole"
[ "$(ls "$work/joined/overlays")" = "$(ls "$work/whole/overlays")" ] || miss "overlays"
checks=$((checks + 1))
"$SWARD" history --history "$work/whole/history.sqlite" --csv | cut -d, -f 1,2,4- >"$work/h1"
"$SWARD" history --history "$work/joined/history.sqlite" --csv | cut -d, -f 1,2,4- >"$work/h2"
[ "$(wc -l <"$work/h1")" -eq "$(wc -l <"$work/h2")" ] || miss "the histories differ in length"
ends 3 gather "$work/p1" "$work/p2" "$work/p3" --out "$work/joined" --json # again: nothing is added
checks=$((checks + 1))
cmp -s "$out" "$work/joined/results.json" || miss "--json is results.json"
says "$work/joined/run.json" '"history_added": 0'

# What does not make one run.
run 2 gather "$work/p1" "$work/p2" --out "$work/none"
says "$err" "part 3 of 3 is missing"
run 2 gather "$work/p1" "$work/p2" "$work/p3" "$work/p1" --out "$work/none"
says "$err" "named twice"
run 2 gather "$work/in" --out "$work/none"
says "$err" "holds no part"
run 2 gather
run 2 run "$work/in" --part 4/3 --out "$work/none"
says "$err" "expected K/N"
run 2 run "$work/in" --part 1/2 --gate --out "$work/none"
ends 3 run "$work/in" --part 1/2 --out "$work/half" --quiet
run 2 gather "$work/p1" "$work/half" --out "$work/none"
says "$err" "the number of parts differs"
printf 'changed' >>"$work/p1/overlays/render_001.png"
run 1 gather "$work/p1" "$work/p2" "$work/p3" --out "$work/none"
says "$err" "overlays/render_001.png: is gone or was changed"
[ ! -e "$work/none/results.json" ] || miss "something was written"
printf '{ "targets": { "spacing_nm": { "min": 90, "max": 140 } } }\n' >"$work/in/protocol.json"
run 2 gather "$work/p1" "$work/p2" "$work/p3" --out "$work/none"
says "$err" "make the parts again"

# One program at a time writes an output; results.json on stdout.
ends 3 run "$work/in" --out "$work/whole" --json
checks=$((checks + 1))
cmp -s "$out" "$work/whole/results.json" || miss "run --json is results.json"
cli_done
