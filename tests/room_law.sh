#!/bin/sh
# The law of the house, checked on the built libraries and the sources:
#   1. pure rooms (metrics, optics, link) ask for no file, clock, environment or print, and keep no writable data
#   2. banned functions appear nowhere
#   3. no include climbs out of its room, no C file outgrows its room
#   4. a forbidden include does not compile
# Each check is first tried on something that breaks it, so that a blind check cannot pass.
set -eu
build=$1
source=$2
compiler=$3
failed=0
bad() { echo "room law: $*"; failed=1; }
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT

impure='U (fopen(64)?|freopen|open(64)?|read|write|fread|fwrite|f?printf|puts|fputs|putchar|__f?printf_chk|time|clock|clock_gettime|gettimeofday|getenv|exit|abort_handler|signal|srand|rand|setlocale)$'
# Writable data by section: constant tables of pointers lie in .data.rel.ro, which is read-only after loading.
writable='\|(\.data|\.bss|\.tdata|\.tbss|\*COM\*)(\.[A-Za-z0-9_.]*)?$'
look_pure() {
    nm -A "$1" 2>/dev/null | grep -E "$impure" || true
    nm -f sysv "$1" 2>/dev/null | grep -E "$writable" | grep -vE '\.data\.rel\.ro|^(__|\.L)' || true
}

cat >"$work/impure.c" <<'C'
#include <stdio.h>
int counter;
static int hidden = 3;
int leak(void);
int leak(void) { FILE *f = fopen("x", "r"); return f ? hidden++ + counter++ : 0; }
C
"$compiler" -c "$work/impure.c" -o "$work/impure.o"
[ "$(look_pure "$work/impure.o" | wc -l)" -ge 3 ] || bad "the purity check is blind"
for room in metrics optics link; do
    found=$(look_pure "$build/libsward_$room.a")
    [ -z "$found" ] || bad "$room is not pure:
$found"
done

banned='U (strcpy|strcat|strncpy|strncat|sprintf|vsprintf|gets|strtok|atoi|atol|atof|localtime|system|popen|rand|srand|setlocale|tmpnam|mktemp)$'
echo 'int atoi(const char *); int f(const char *s); int f(const char *s) { return atoi(s); }' >"$work/banned.c"
"$compiler" -O0 -fno-builtin -c "$work/banned.c" -o "$work/banned.o"
nm -A "$work/banned.o" | grep -qE "$banned" || bad "the banned-function check is blind"
for library in "$build"/libsward_*.a; do
    found=$(nm -A "$library" 2>/dev/null | grep -E "$banned" || true)
    [ -z "$found" ] || bad "banned function:
$found"
done

found=$(for library in "$build"/libsward_*.a; do nm "$library" 2>/dev/null; done | grep -E '^[0-9a-f]+ [TDBR] ' | awk '{ print $3 }' \
    | grep -v '^__' | sort | uniq -d)
[ -z "$found" ] || bad "a name is defined in two rooms:
$found"
found=$(grep -rnE '#include "[^"]*\.\./' "$source/io" "$source/metrics" "$source/pipeline" --include='*.[ch]' || true)
[ -z "$found" ] || bad "an include climbs out of its room:
$found"
for file in $(find "$source/io" "$source/metrics" "$source/pipeline" -name '*.[ch]' ! -name '*_data.[ch]'); do
    lines=$(wc -l <"$file")
    [ "$lines" -le 600 ] || bad "$file has $lines lines: more than one room's worth (600)"
done

forbidden() { # room, header it must not see
    printf '#include "%s"\nint x_law(void);\nint x_law(void) { return 0; }\n' "$2" >"$work/law.c"
    roots=""
    case $1 in
        base) list=base ;;
        io) list="io base" ;;
        metrics|optics|judge) list="$1 base" ;;
        link) list="link metrics optics base" ;;
        report) list="report io metrics optics judge base" ;;
    esac
    for r in $list; do roots="$roots -I$build/inc/$r"; done
    # shellcheck disable=SC2086
    if "$compiler" -std=c11 -fsyntax-only $roots "$work/law.c" 2>/dev/null; then bad "$1 can include $2"; fi
}
printf '#include "metrics/plane.h"\nint x_law(void);\nint x_law(void) { return 0; }\n' >"$work/law.c"
"$compiler" -std=c11 -fsyntax-only -I"$build/inc/metrics" -I"$build/inc/base" "$work/law.c" || bad "the include check is blind"
forbidden base io/load.h
forbidden io metrics/plane.h
forbidden metrics io/load.h
forbidden optics metrics/plane.h
forbidden optics io/file.h
forbidden judge report/rows.h
forbidden link io/file.h
forbidden report app/render.h
forbidden report link/predict.h

[ "$failed" -eq 0 ] && echo "1 passed, 0 failed"
exit "$failed"
