#!/bin/sh
# kill.sh PROGRAM [KILLS]: SIGKILL at random moments of `run` and `watch` (4 in the normal tests, 100 by hand). After each kill the
# tables parse and belong to one run, before or after; the history is whole; and the next run ends with the bytes of one that
# nobody disturbed.
set -u
sward=$1
kills=${2:-10}
case $sward in /*) ;; *) sward=$PWD/$sward ;; esac
command -v python3 >/dev/null || { echo "skipped: python3 is not there"; exit 77; }
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
cd "$work" || exit 1
failed=0
passed=0
check() { what=$1; shift; if "$@"; then passed=$((passed + 1)); else failed=$((failed + 1)); echo "failed: $what"; fi; }
same() { diff -rq -x run.json -x history.sqlite -x cache -x verdicts.jsonl "$1" "$2"; }

mkdir in
"$sward" render --out store --count 6 --size 320x240 --spacing 120 >/dev/null
printf '{ "protocol": "kill", "targets": { "spacing_nm": { "min": 100, "max": 140 } } }\n' >in/protocol.json
for i in 1 2 3; do mv "store/render_00$i.png" "in/a${i}x.png"; done
"$sward" run in --out few --quiet
cp -rp in more
for i in 4 5 6; do mv "store/render_00$i.png" "more/a${i}x.png"; done
"$sward" run more --out many --quiet

# One run with the folder as it was, or as it is: nothing in between.
cat >consistent.py <<'P'
import csv, json, os, sqlite3, sys
out = sys.argv[1]
if os.path.exists(out + "/history.sqlite"):
    db = sqlite3.connect(out + "/history.sqlite")
    assert db.execute("pragma integrity_check").fetchone() == ("ok",)
    if db.execute("select count(*) from sqlite_master where name = 'runs'").fetchone()[0]:
        rows = db.execute("select sample, fingerprint from runs").fetchall()
        assert len(rows) == len(set(rows))
if os.path.exists(out + "/.sward-new/.complete"):
    sys.exit(0)  # killed between the first and the last renaming: the next start finishes it
if not os.path.exists(out + "/images.csv"):
    sys.exit(0)  # killed before the first outputs
table = lambda name: list(csv.DictReader(open(out + "/" + name)))
images, samples, spectra = table("images.csv"), table("samples.csv"), table("spectra.csv")
r = json.load(open(out + "/results.json"))
json.load(open(out + "/datapackage.json"))
files = [i["file"] for i in images]
assert len(files) in (3, 6), files
assert files == [i["file"] for i in r["images"]]
assert [s["sample"] for s in samples] == [s["sample"] for s in r["samples"]]
assert {s["sample"] for s in spectra} == {s["sample"] for s in samples}
page = open(out + "/report.html").read()
assert page.rstrip().endswith("</html>") and all(f in page for f in files) and page.count("<article") == len(files)
for f in files:
    stem = f[:-4]
    assert os.path.exists(out + "/overlays/" + stem + ".png")
    assert table("features/" + stem + ".csv") and table("profiles/" + stem + ".csv")
assert sorted(os.listdir(out + "/overlays")) == sorted(f for f in files)
P

# A random part of the time one undisturbed run takes: splitmix by awk, a seed a kill.
pause() { awk -v s="$1" -v top="$2" 'BEGIN { srand(s); printf "%.3f", rand() * top }'; }
begin=$(date +%s%N); rm -rf t; cp -r few t; "$sward" run more --out t --quiet; took=$(awk -v a="$begin" -v b="$(date +%s%N)" 'BEGIN { print (b - a) / 1e9 }')

k=0
while [ "$k" -lt "$kills" ]; do
    k=$((k + 1))
    if [ $((k % 2)) -eq 1 ]; then # from the outputs of three micrographs to those of six, without what is remembered
        rm -rf o; cp -rp few o; rm -rf o/cache
        "$sward" run more --out o --quiet 2>/dev/null &
        victim=$!
        copier=$victim
    else # a watch that starts with nothing while micrographs come
        rm -rf o w; cp -rp in w
        "$sward" watch w --out o --every 0.2 --patience 0.5 --quiet 2>/dev/null &
        victim=$!
        (sleep "$(pause "$k" 1)"; cp -p more/*.png w/) &
        copier=$!
    fi
    sleep "$(pause "$((1000 + k))" "$(awk -v t="$took" -v w="$((k % 2))" 'BEGIN { print w ? t : 2 * t + 1 }')")"
    kill -9 "$victim" 2>/dev/null
    wait "$victim" "$copier" 2>/dev/null
    check "kill $k: consistent" python3 consistent.py o
    source=more; [ $((k % 2)) -eq 1 ] || source=w
    check "kill $k: completes" "$sward" run "$source" --out o --quiet
    check "kill $k: the bytes of an undisturbed run" same many o
    check "kill $k: nothing left over" [ -z "$(find o -name '.sward-*' ! -name .sward-lock)" ]
    check "kill $k: the history" [ "$("$sward" history --history o/history.sqlite --csv | tail -n +2 | cut -d, -f 1 | sort -u | wc -l)" -eq 6 ]
done
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ] && [ "$passed" -gt 0 ]
