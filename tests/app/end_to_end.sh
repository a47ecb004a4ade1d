#!/bin/sh
# The binary on whole folders: exit codes, nothing lost, same bytes at any number of workers, same digits everywhere.
#   end_to_end.sh PROGRAM CASE
set -u
sward=$1
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
rows() { [ "$(tail -n +2 "$1" | wc -l)" -eq "$2" ] || { echo "rows of $1:"; cat "$1"; return 1; }; }
picture() { "$sward" render --out "$1" --name "$2" --spacing 300 --px 8 --size 480x360 --seed "$3" >/dev/null; }

case $2 in
bad_files) # an empty file, a truncated picture, a text named .tif and one good micrograph
    mkdir "$work/in"
    picture "$work/in" good 7
    good=$(ls "$work/in"/*.png | head -n 1)
    : >"$work/in/empty.png"
    head -c 9000 "$good" >"$work/in/truncated.png"
    echo "these are notes, not a picture" >"$work/in/notes.tif"
    echo "more notes" >"$work/in/readme.txt"
    check "exit 3" code_is 3 "$sward" run "$work/in" --out "$work/o"
    check "four rows" rows "$work/o/images.csv" 4
    check "three unreadable" [ "$(grep -c ',unreadable,' "$work/o/images.csv")" -eq 3 ]
    check "one measured" [ "$(grep -c ',ok,' "$work/o/images.csv")" -eq 1 ]
    check "each has its reason" [ "$(awk -F, '$3 == "unreadable" && $4 == ""' "$work/o/images.csv" | wc -l)" -eq 0 ]
    check "the page is there" says "truncated.png" "$work/o/report.html"
    check "results.json names all" says "notes.tif" "$work/o/results.json"
    ;;
same_bytes) # jobs 1, 2, 4; a second run from memory; a fresh one
    mkdir "$work/in"
    for i in 1 2 3; do picture "$work/in" "w$i" "$i"; done
    for j in 1 2 4; do check "jobs $j" code_is 0 "$sward" run "$work/in" --out "$work/o$j" --jobs "$j" --history "$work/h$j.sqlite"; done
    cp -r "$work/o2" "$work/again"
    check "second run" code_is 0 "$sward" run "$work/in" --out "$work/again" --history "$work/h2.sqlite"
    for o in o2 o4 again; do
        rm -f "$work/$o/run.json" "$work/o1/run.json"
        check "$o as o1" diff -r "$work/o1" "$work/$o"
    done
    check "fresh run" code_is 0 "$sward" run "$work/in" --out "$work/again" --fresh --history "$work/h2.sqlite"
    rm -f "$work/again/run.json"
    check "fresh as o1" diff -r "$work/o1" "$work/again"
    check "history once per sample" [ "$("$sward" history --history "$work/h2.sqlite" --csv | tail -n +2 | wc -l)" -eq "$(tail -n +2 "$work/o1/samples.csv" | wc -l)" ]
    ;;
threads) # a thread sanitizer build exits with its own code when two workers touch the same memory
    mkdir "$work/in"
    for i in 1 2 3 4; do picture "$work/in" "t$i" "$i"; done
    check "four workers" code_is 0 "$sward" run "$work/in" --out "$work/o" --jobs 4
    check "nothing said" [ ! -s "$work/err.txt" ]
    ;;
verdicts) # targets, the gate, no pixel size, duplicates, a sheet
    mkdir "$work/in"
    picture "$work/in" a 1
    picture "$work/in" b 2
    "$sward" render --out "$work/in" --name c --spacing 300 --px 8 --size 480x360 --seed 3 --no-scale --no-strip >/dev/null
    first=$(cd "$work/in" && ls a*.png | head -n 1)
    cp "$work/in/$first" "$work/in/copy_of_a.png"
    rm -f "$work/in/truth.json"
    printf 'file,sample,etched_at,height_nm,height_nm_u,chamber\n%s,S1,2026-03-01T08:00,310,15,north\ncopy_of_a.png,S1,2026-03-01T08:00,310,15,north\n' "$first" >"$work/in/samples.csv"
    printf '{ "protocol": "tight", "targets": { "spacing_nm": { "min": 100, "max": 150 } } }\n' >"$work/in/protocol.json"
    check "exit 3: one has no pixel size" code_is 3 "$sward" run "$work/in" --out "$work/o"
    check "exit 4 with the gate" code_is 4 "$sward" run "$work/in" --out "$work/o" --gate
    check "reason" says "no_pixel_size" "$work/o/images.csv"
    check "duplicate" says "duplicate" "$work/o/images.csv"
    check "fails" says ",fails," "$work/o/samples.csv"
    check "carried along" says "north" "$work/o/samples.csv"
    check "used once" says "^S1,.*,2,1," "$work/o/samples.csv"
    check "px figures" says "spacing_acf_px" "$work/o/results.json"
    printf '{ "targets": { "spacing_nm": { "mix": 100 } } }\n' >"$work/bad.json"
    check "wrong protocol" code_is 2 "$sward" run "$work/in" --out "$work/o" --protocol "$work/bad.json"
    check "names the line" says "line 1" "$work/err.txt"
    check "no folder" code_is 2 "$sward" run "$work/nowhere" --out "$work/o"
    check "no folder given" code_is 2 "$sward" run
    mkdir "$work/void"
    check "nothing in it" code_is 2 "$sward" run "$work/void" --out "$work/o5"
    : >"$work/file"
    check "output cannot be written" code_is 1 "$sward" run "$work/in" --out "$work/file/o"
    ;;
measure)
    picture "$work" m 5
    m=$(ls "$work"/m*.png | head -n 1)
    check "json" code_is 0 "$sward" measure "$m" --json
    check "relief" says '"relief": *"hillock"' "$work/out.txt"
    check "csv" code_is 0 "$sward" measure "$m" --csv
    check "columns" says "^file,sample,status,reason,flags,px_nm," "$work/out.txt"
    check "lines" code_is 0 "$sward" measure "$m" --px 8
    check "option wins" says "spacing_hex_nm" "$work/out.txt"
    check "none given" code_is 2 "$sward" measure
    check "missing file" code_is 3 "$sward" measure "$work/none.png" --json
    check "is said" says "unreadable" "$work/out.txt"
    ;;
*) echo "no case $2"; exit 1 ;;
esac
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ] && [ "$passed" -gt 0 ]
