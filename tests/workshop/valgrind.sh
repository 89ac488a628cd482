#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# valgrind.sh PROGRAM: check, analyze, fit and selfcheck without an error or a leak under valgrind.
set -u
cd "$(dirname "$0")/../.." || exit 1
program=$1
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
failed=0
clean() { # NAME ARGUMENT...
    local name=$1
    shift
    if valgrind -q --leak-check=full --show-leak-kinds=all --error-exitcode=99 \
        --suppressions=tests/workshop/valgrind.supp "$program" "$@" >"$work/out" 2>"$work/err"; then
        echo "ok - valgrind: $name"
    else
        echo "not ok - valgrind: $name (status $?)"
        head -40 "$work/err"
        failed=1
    fi
}
d=data_examples
clean "check" check $d/itch/design.json
clean "analyze, continuous, draws" analyze $d/itch/design.json $d/itch/interim.csv --draws -o "$work/a" --quiet
clean "analyze, binary" analyze $d/antibiotic_days/design.json $d/antibiotic_days/interim.csv -o "$work/b" --quiet --threads 2
clean "fit, groups" fit $d/tables/itch_by_dose.csv --curve sigmoid_emax -o "$work/c" --quiet
clean "fit, a walk" fit tests/data/fit/rat42.csv --curve ndlm -o "$work/e" --quiet
clean "selfcheck" selfcheck -o "$work/d" --quiet
"$program" check tests/designs/bad/adapt_unknown.json >/dev/null 2>&1
[ $? = 2 ] || failed=1
valgrind -q --leak-check=full --error-exitcode=99 --suppressions=tests/workshop/valgrind.supp \
    "$program" check tests/designs/bad/adapt_unknown.json >/dev/null 2>"$work/err"
[ $? = 2 ] && echo "ok - valgrind: a wrong design" || { echo "not ok - valgrind: a wrong design"; cat "$work/err"; failed=1; }
exit $failed
