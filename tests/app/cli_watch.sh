#!/bin/sh
# A watched folder: half-copied files wait, whole ones are measured once, verdicts are told once, kills and signals leave
# everything whole.
. "$(dirname "$0")/cli.sh"
watch_pid=
trap '[ -z "$watch_pid" ] || kill -9 "$watch_pid" 2>/dev/null; rm -rf "$work"' EXIT

# soon SECONDS COMMAND: the command succeeds within the time.
soon() {
    left=$(($1 * 10)); shift
    checks=$((checks + 1))
    until "$@" 2>/dev/null; do
        left=$((left - 1))
        [ "$left" -gt 0 ] || { miss "not within its time: $*"; cat "$work/watch.err"; return; }
        sleep 0.1
    done
}
start() { "$SWARD" watch "$work/in" --out "$work/o" --every 0.5 "$@" >>"$work/watch.out" 2>>"$work/watch.err" & watch_pid=$!; }
ends() { # SIGNAL: ends with 0
    checks=$((checks + 1))
    kill "-$1" "$watch_pid"
    wait "$watch_pid"
    code=$?
    [ "$code" -eq 0 ] || miss "exit $code after SIG$1"
    watch_pid=
}
rows() { [ "$(tail -n +2 "$work/o/$1" | wc -l)" -eq "$2" ]; }
told() { [ "$(wc -l <"$work/told")" -eq "$1" ]; }

mkdir "$work/in"
run 0 render --out "$work/store" --count 4 --size 320x240 --spacing 120
cd "$work/store" && for i in 1 2 3 4; do mv "render_00$i.png" "w${i}x.png"; done
cp w1x.png "$work/in/hostile \$(touch $$) ;'\"x.png"
printf '{ "protocol": "watch", "targets": { "spacing_nm": { "min": 100, "max": 140 } } }\n' >"$work/in/protocol.json"
cat >"$work/tell.sh" <<'T'
#!/bin/sh
cat >>"$0.stdin"
printf '%s|%s|%s|%s\n' "$#" "$SWARD_SAMPLE" "$SWARD_VERDICT" "$SWARD_PREVIOUS_VERDICT" >>"$(dirname "$0")/told"
exit 3
T
chmod +x "$work/tell.sh"
: >"$work/told"

start --on-verdict "$work/tell.sh"
soon 20 rows samples.csv 1
head -c 9000 w2x.png >"$work/in/w2x.png"   # half a copy
cp w3x.png "$work/in/w3x.png"
soon 20 rows samples.csv 2
soon 5 told 2
checks=$((checks + 1))
grep -q "w2x" "$work/o/images.csv" && miss "a half-copied file is a row"
run 1 run "$work/in" --out "$work/o" # one at a time
says "$err" "another sward (process $watch_pid) is writing there"
cp w2x.png "$work/in/w2x.png"
soon 20 rows samples.csv 3
soon 5 told 3
ends TERM
says "$work/told" "0|w3x|" "0|hostile \$(touch $$) ;'\"x|"
[ ! -e "$$" ] || miss "a name was run"
says "$work/watch.err" "ended with exit status 3"
checks=$((checks + 1))
[ "$(wc -l <"$work/watch.out")" -eq 3 ] || miss "one line a verdict"
command -v python3 >/dev/null && { checks=$((checks + 1)); python3 -c 'import json,sys; r=[json.loads(l) for l in open(sys.argv[1])]; assert len(r)==3 and r[0]["row"]["spacing_nm"]>0 and r[0]["out"]' "$work/tell.sh.stdin" || miss "the JSON of a verdict"; }

# A restart tells nothing again and adds nothing; the outputs are those of a run.
start --on-verdict "$work/tell.sh" --once
checks=$((checks + 1))
wait "$watch_pid" || miss "--once ends with 0"
watch_pid=
told 3 || miss "told again"
run 0 run "$work/in" --out "$work/p" --history "$work/p.sqlite"
run 0 run "$work/in" --out "$work/o"
checks=$((checks + 1))
for file in images.csv samples.csv spectra.csv; do cmp -s "$work/o/$file" "$work/p/$file" || miss "$file is not that of a run"; done
[ "$("$SWARD" history --history "$work/o/history.sqlite" --csv | tail -n +2 | wc -l)" -eq 3 ] || miss "rows of the history"

# A changed verdict is told with the one before; a program that hangs is ended and stops nothing; kill -9 loses nothing.
printf '#!/bin/sh\necho "$SWARD_SAMPLE|$SWARD_VERDICT|$SWARD_PREVIOUS_VERDICT" >>"$(dirname "$0")/slow"\nsleep 1000 &\nsleep 1000\n' >"$work/slow.sh"
chmod +x "$work/slow.sh"
printf '{ "protocol": "watch", "targets": { "spacing_nm": { "min": 10, "max": 20 } } }\n' >"$work/in/protocol.json"
start --on-verdict "$work/slow.sh" --verdict-time 0.3 --once
checks=$((checks + 1))
wait "$watch_pid" || miss "a slow program stops the watch"
watch_pid=
says "$work/watch.err" "it took longer than 0.3 s"
says "$work/slow" "w3x|fails|"
[ "$(sort -u "$work/slow" | wc -l)" -eq 3 ] || miss "each once"
start
soon 10 test -e "$work/o/.sward-lock"
cp w4x.png "$work/in/w4x.png"
sleep 0.7
kill -9 "$watch_pid"; wait "$watch_pid" 2>/dev/null; watch_pid=
start
soon 20 rows samples.csv 4
ends INT

# Wrong from the start.
run 2 watch
run 2 watch "$work/nowhere" --out "$work/o"
run 2 watch "$work/in" --out "$work/o" --on-verdict "$work/none"
says "$err" "no program that can be run"
run 2 watch "$work/in" --out "$work/in"
says "$err" "the watched folder itself"
run 2 watch "$work/in" --out "$work/o" --every x
printf '{ "targtes": {} }\n' >"$work/in/protocol.json"
run 2 watch "$work/in" --out "$work/o"
says "$err" "targtes"
cli_done
