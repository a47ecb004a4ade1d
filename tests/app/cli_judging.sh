#!/bin/sh
# Verdicts by every rule, on columns of the tables and of the sheet; places by name; charts in results.json; the same run twice and
# under another protocol.
set -u
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
failed=0
passed=0
check() { # sentence, then a command that must succeed
    what=$1; shift
    if "$@"; then passed=$((passed + 1)); else failed=$((failed + 1)); echo "failed: $what"; fi
}
code_is() { want=$1; shift; "$@" >"$work/out.txt" 2>"$work/err.txt"; got=$?; [ "$got" -eq "$want" ] || { echo "exit $got, wanted $want: $*"; cat "$work/err.txt"; return 1; }; }
says() { grep -q -- "$1" "$2" || { echo "no '$1' in:"; head -c 2000 "$2"; return 1; }; }

mkdir "$work/in"
for i in 1 2 3; do "$SWARD" render --out "$work/in" --name "w$i" --spacing 300 --px 8 --size 480x360 --seed "$i" >/dev/null; done
rm -f "$work/in/truth.json"
cd "$work/in" || exit 1
printf 'file,sample,wafer,position,etched_at,recipe,mass_mg,mass_mg_u\n' >samples.csv
for i in 1 2 3; do
    set -- C M E
    shift $((i - 1))
    printf '%s,S%s,W1,%s,2026-03-01T08:00:00Z,A,%s,0.1\n' "$(ls w$i*.png)" "$i" "$1" "3.$i" >>samples.csv
done
cat >protocol.json <<'END'
{ "protocol": "rules",
  "targets": { "spacing_nm": { "min": 100, "max": 330, "rule": "simple" },
               "density_per_um2": { "min": 1, "rule": "probability", "at_least": 0.9 },
               "mass_mg": { "max": 3.4, "rule": "guard" },
               "n_used": { "min": 1 } },
  "samples": { "positions": { "C": [0, 0], "M": [35, 0], "E": [0, 70] } },
  "charts": { "rules": "iso,ewma", "baseline": 25 } }
END
run() { code_is 0 "$SWARD" run "$work/in" --out "$work/o" --history "$work/h.sqlite" "$@"; }
check "run" run
r=$work/o/results.json
check "rule of each target" says '"rule": "simple", "at_least": null, "verdict": "conforms"' "$r"
check "probability" says '"rule": "probability", "at_least": 0.9, "verdict": "conforms", "conformance_probability": 1' "$r"
check "sheet: 3.1 keeps 3.4" says '"quantity": "mass_mg", "rule": "guard", "at_least": 0.95, "verdict": "conforms"' "$r"
check "sheet: 3.3 does not with its guard band" says '"quantity": "mass_mg", "rule": "guard", "at_least": 0.95, "verdict": "undecided"' "$r"
check "what would settle it" says 'measure it again, with a smaller uncertainty' "$r"
check "columns" says 'verdict_spacing_nm,verdict_density_per_um2,verdict_mass_mg,verdict_n_used' "$work/o/samples.csv"
check "the rule is said" says 'Decided by conformance probability of at least 0.9 (JCGM 106): density_per_um2.' "$work/out.txt"
check "places by name" says 'on wafer W1: edge less centre' "$work/out.txt"
check "evenness of the reflectance" says '"quantity": "weighted_reflectance"' "$r"
check "charts" says '"series": \[' "$r"
check "their rules" says '"rules": \["beyond", "run7", "trend7", "ewma"\]' "$r"
check "three samples, one etch" says '"samples": 3, "phase": 1' "$r"
check "again" run
check "nothing new" [ "$("$SWARD" history --history "$work/h.sqlite" --csv | tail -n +2 | wc -l)" -eq 3 ]
sed -i 's/"max": 330/"max": 340/' protocol.json
check "another protocol" run
check "keeps the old" [ "$("$SWARD" history --history "$work/h.sqlite" --csv | tail -n +2 | wc -l)" -eq 6 ]
code_is 0 "$SWARD" history differences --history "$work/h.sqlite"
check "and lists what changed" says '3 etches were run again' "$work/out.txt"
check "the micrographs are there" code_is 0 "$SWARD" history verify --history "$work/h.sqlite"
check "three of them" says '3 micrographs are the ones that were measured' "$work/out.txt"
rm -f w2*.png
check "one is gone" code_is 3 "$SWARD" history verify --history "$work/h.sqlite"
sed -i 's/"mass_mg"/"mass_kg"/' protocol.json
check "no such column" code_is 2 "$SWARD" run "$work/in" --out "$work/o" --history "$work/h.sqlite"
check "says which" says "'mass_kg' is neither a quantity of samples.csv nor a column of the sample sheet, did you mean 'mass_mg'" "$work/err.txt"
sed -i 's/"mass_kg"/"spacing_mn"/' protocol.json
check "a slip" code_is 2 "$SWARD" run "$work/in" --out "$work/o"
check "is named" says "did you mean 'spacing_nm'" "$work/err.txt"

echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ] && [ "$passed" -gt 0 ]
