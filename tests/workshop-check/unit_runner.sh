#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# unit_runner.sh: the runner of unit tests (unit.h) prints what happened to each test, with where,
# and its line for a finished test survives a crash in a later one.
set -u
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
faults=0

cat >"$work/program.c" <<'C'
#include "unit.h"
#include <stdlib.h>
void base_init(void) {}
static void good(void) { CU_ASSERT_EQUAL(unit_fast(), getenv("FAST") != NULL); }
static void bad(void) { CU_ASSERT(1 + 1 == 3); CU_ASSERT_FATAL(2 + 2 == 5); CU_ASSERT(!"reached"); }
static void left_out(void) { unit_skip("no such machine"); }
static void empty(void) {}
static void crash(void) { abort(); }
int main(void)
{
    static const struct unit_test tests[] = {
        {"good", good}, {"bad", bad}, {"left out", left_out}, {"empty", empty}, {"good again", good},
        {"crash", crash}, UNIT_END};
    return unit_main("room", tests);
}
C
if ! "${CC:-gcc}" -std=c11 -Isrc -Itests/unit -o "$work/program" "$work/program.c" \
    tests/unit/unit.c -lcunit 2>"$work/said"; then
    echo "not ok - unit runner: compiles"
    cat "$work/said"
    exit 1
fi

# expect NAME STATUS: the program ends with it and printed what is in $work/want, line numbers aside
expect() {
    local got
    { (unset FAST; ${setting:-env} "$work/program") >"$work/got"; } 2>/dev/null
    got=$?
    sed -i 's/^    .*program\.c:[0-9]*:/    FILE:LINE:/' "$work/got"
    if [ $got -eq "$2" ] && cmp -s "$work/want" "$work/got"; then
        echo "ok - unit runner: $1"
    else
        echo "not ok - unit runner: $1"
        echo "    status $got, expected $2; < expected, > printed:"
        diff "$work/want" "$work/got" | sed 's/^/    /'
        faults=1
    fi
}

cat >"$work/want" <<'W'
ok - room: good
not ok - room: bad
    FILE:LINE: 1 + 1 == 3
    FILE:LINE: 2 + 2 == 5
skip - room: left out # no such machine
not ok - room: empty
    the test asserted nothing
ok - room: good again
W
expect "a line a test, up to a crash" 134

setting="env FAST=1 UNIT_ONLY=good"
printf 'ok - room: good\nok - room: good again\n' >"$work/want"
expect "only the tests asked for, FAST is seen" 0
exit $faults
