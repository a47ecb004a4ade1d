# What the cli_*.sh scripts share; sourced. SWARD is the program. Each script ends with `cli_done`.
set -u
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
out=$work/out.txt err=$work/err.txt
checks=0 failed=0

miss() { failed=$((failed + 1)); echo "failed: $*"; }

# run CODE ARGUMENTS...: the program ends with CODE; a failure says something on stderr, a success nothing.
run() {
    want=$1; shift
    checks=$((checks + 1))
    "$SWARD" "$@" >"$out" 2>"$err" </dev/null
    got=$?
    [ "$got" -eq "$want" ] || { miss "exit $got, wanted $want: sward $*"; cat "$err"; }
    if [ "$want" -eq 0 ]; then [ ! -s "$err" ] || { miss "stderr of: sward $*"; cat "$err"; }
    else [ -s "$err" ] || miss "no reason given: sward $*"; fi
}

# says FILE WORDS...: each stands in the file.
says() {
    file=$1; shift
    for words in "$@"; do
        checks=$((checks + 1))
        grep -qF -e "$words" "$file" || { miss "'$words' is not in:"; head -n 20 "$file"; }
    done
}

# near KEY WANTED TOLERANCE: a number of the JSON in $out, by its key.
near() {
    checks=$((checks + 1))
    sed -n "s/^ *\"$1\": *\([-0-9.e+]*\),*\$/\1/p" "$out" | head -n 1 |
        awk -v want="$2" -v tol="$3" '{ n++; d = $1 - want; if (d < 0) d = -d; ok = d <= tol } END { exit !(n == 1 && ok) }' ||
        { miss "$1: wanted $2 +- $3, found:"; grep -F "\"$1\"" "$out" | head -n 2; }
}

cli_done() { echo "$((checks - failed)) passed, $failed failed"; [ "$failed" -eq 0 ] && [ "$checks" -gt 0 ]; exit; }
