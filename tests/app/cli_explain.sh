#!/bin/sh
# explain: every part of the account is there, agrees with the outputs, and is refused in a sentence where it is not.
. "$(dirname "$0")/cli.sh"
run 0 render --out "$work/in" --count 3 --size 320x240 --spacing 120
cp "$work/in/render_001.png" "$work/in/copy.png"
head -c 9000 "$work/in/render_002.png" >"$work/in/broken.png"
printf 'file,sample,lot,height_nm,height_nm_u\nrender_001.png,S 1,L7,110,9\nrender_002.png,S 1,,110,9\ncopy.png,S 1,,,\nbroken.png,S 1,,,\n' >"$work/in/samples.csv"
printf '{ "protocol": "grass 3", "targets": { "spacing_nm": { "min": 100, "max": 140 } } }\n' >"$work/in/protocol.json"
checks=$((checks + 1))
"$SWARD" run "$work/in" --out "$work/o" --quiet
[ $? -eq 3 ] || miss "one file is broken"

run 0 explain "S 1" --out "$work/o"
says "$out" "Sample S 1: 2 of 4 micrographs used" "lot               L7" "autocorrelation of the curvature map" "ISO 14253-1" "conforms" \
    "from pHYs" "measured, from the sample sheet" "grass 3" "cut by the frame" "duplicate: the same bytes" "unreadable" "bruggeman-2d" "length standard"
for hash in $(sha256sum "$work/in/render_001.png" "$work/in/render_002.png" | cut -d ' ' -f 1); do says "$out" "SHA-256         $hash"; done
checks=$((checks + 1))
grep -q "weighted_reflectance" "$out" && miss "only what has a target"
run 0 explain "S 1" weighted_reflectance --out "$work/o"
says "$out" "none in the protocol" "shape of the features" "95 % interval" "ASTM G173"
run 0 explain render clark_evans --out "$work/o"
says "$out" "Donnelly" "nobody stated any"
run 0 explain "S 1" --history "$work/o/history.sqlite"
says "$out" "first ring of" "From the history" "its reasons" "spacing_nm"
run 0 explain "S 1" size_d50_nm --out "$work/o" --json
if command -v python3 >/dev/null; then
    checks=$((checks + 1))
    python3 - "$out" "$work/o/results.json" <<'P' || miss "the JSON account does not agree with results.json"
import json, sys
a, r = (json.load(open(p)) for p in sys.argv[1:])
s = [x for x in r["samples"] if x["sample"] == "S 1"][0]
q, = a["quantities"]
assert q["quantity"] == "size_d50_nm" and q["value"] == s["size_d50_nm"] and q["u"] == s["size_d50_nm_u"]
assert abs(sum(p["share"] for p in q["uncertainty"]) - 1) < 1e-9
assert abs(sum(p["u"] ** 2 for p in q["uncertainty"]) ** 0.5 / q["u"] - 1) < 0.01
assert [m["sha256"] for m in a["micrographs"] if "sha256" in m] == [i["sha256"] for i in r["images"] if i["sample"] == "S 1" and "sha256" in i]
m = r["manifest"]
assert m["libraries"]["SQLite"] and m["libraries"]["FFTW"] and len(m["basis_sha256"]) == 64 and m["options"] == {"px_nm": None, "bar_nm": None, "keep_tilt": False}
assert {x["role"] for x in m["materials"]} >= {"sun", "substrate"} and all(len(x["sha256"]) == 64 for x in m["materials"])
P
fi
run 2 explain
run 2 explain "S 1" nothing_nm --out "$work/o"
says "$err" "is no quantity of a sample; there are"
run 2 explain "S 2" --out "$work/o"
says "$err" "is no sample of the run"
run 2 explain "S 1" --out "$work/in"
says "$err" "holds no results.json"
run 2 explain "S 2" --history "$work/o/history.sqlite"
run 1 explain "S 1" --history "$work/none.sqlite"
cli_done
