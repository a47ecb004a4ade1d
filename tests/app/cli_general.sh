#!/bin/sh
# Dispatch: help of every command, version, wrong use, unknown words with the nearest known one, a full disk, links.
. "$(dirname "$0")/cli.sh"

run 0 --help
says "$out" "Usage: sward COMMAND" run measure predict render history protocol "Exit status"
run 0 help
for command in run measure predict render history protocol; do
    run 0 "$command" --help
    says "$out" "Usage: sward $command" "--help"
    run 0 help "$command"
    says "$out" "Usage: sward $command"
    run 2 "$command" --no-such-option
    says "$err" "sward $command: unknown option '--no-such-option'"
done
run 0 --version
says "$out" "sward "
[ "$(wc -l <"$out")" -eq 1 ] || miss "version is one line"
run 2
says "$err" "Usage: sward COMMAND"
run 2 predcit
says "$err" "unknown command 'predcit', did you mean 'predict'?"
run 2 help mesure
says "$err" "unknown command 'mesure', did you mean 'measure'?"
run 2 predict --spacng 350 --height 300
says "$err" "unknown option '--spacng', did you mean '--spacing'?"
run 2 predict --spacing
run 0 predict --spacing 350 --hemis --height 300 # an abbreviation that fits one option
run 0 predict --spacing 350 --height=300

# What could not be written is no success.
if [ -w /dev/full ]; then
    for arguments in "predict --height 0" "protocol print" "--help" "predict --help" "--version"; do
        checks=$((checks + 1))
        # shellcheck disable=SC2086
        "$SWARD" $arguments >/dev/full 2>"$err"
        [ $? -eq 1 ] || miss "a full disk is exit 1: $arguments"
        says "$err" "cannot write the output"
    done
fi

# The materials are found through a link to the program from another folder.
real=$(cd "$(dirname "$SWARD")" && pwd)/$(basename "$SWARD")
ln -s "$real" "$work/link"
checks=$((checks + 1))
(cd / && unset SWARD_MATERIALS && "$work/link" predict --height 0 >"$out" 2>"$err") || { miss "through a link"; cat "$err"; }
says "$out" "34.98"
checks=$((checks + 1))
SWARD_MATERIALS=$work/nowhere "$SWARD" predict --height 0 >"$out" 2>"$err"
[ $? -eq 1 ] || miss "a materials folder that is not there is exit 1"
says "$err" "SWARD_MATERIALS names"

# Manual page and completion name every command and every shown option.
"$SWARD" --man >"$work/sward.1"
"$SWARD" --completion >"$work/completion"
says "$work/sward.1" ".TH SWARD 1" ".SH EXIT STATUS"
for command in run measure predict render history protocol; do
    says "$work/sward.1" ".SS sward $command"
    says "$work/completion" "$command"
    for option in $("$SWARD" "$command" --help | sed -n 's/^ *\(-[a-z], \)\{0,1\}--\([a-z-]*\).*/\2/p' | grep -v -e usage -e version); do
        says "$work/completion" "--$option"
        case $option in help) ;; *) says "$work/sward.1" "$(printf '%s' "\\-\\-$option" | sed 's/\([a-z]\)-/\1\\-/g')" ;; esac
    done
done
if command -v bash >/dev/null 2>&1; then
    checks=$((checks + 1))
    got=$(bash -c '. "$1"; COMP_WORDS=(sward predict --heig); COMP_CWORD=2; _sward; echo "${COMPREPLY[*]}"' - "$work/completion")
    [ "$got" = "--height --height-u --height-spread --height-spread-u" ] || miss "completion of --heig gave: $got"
fi
cli_done
