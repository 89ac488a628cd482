#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# run_counts.sh: tests/run counts what passes, fails, is skipped, crashes, hangs or says nothing.
set -u
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT

# make_item NAME BODY: a script that tests/run will run
make_item() {
    printf '#!/bin/sh\n%s\n' "$2" >"$work/$1"
    chmod +x "$work/$1"
}
# expect NAME STATUS LAST-LINE PATTERN ITEM...: PATTERN, if any, is a line that must be printed
expect() {
    local name=$1 status=$2 last=$3 pattern=$4 got
    shift 4
    TEST_TIMEOUT=1 tests/run "${@/#/$work/}" >"$work/said" 2>&1
    got=$?
    if [ $got -eq "$status" ] && [ "$(tail -n 1 "$work/said")" = "$last" ] &&
        { [ -z "$pattern" ] || grep -q "$pattern" "$work/said"; }; then
        echo "ok - run counts: $name"
    else
        echo "not ok - run counts: $name"
        echo "    status $got, expected $status; last line expected: $last; it printed:"
        sed 's/^/    | /' "$work/said"
        faults=1
    fi
}
faults=0

make_item good 'echo "ok - a"; echo "ok - b"'
make_item slow 'sleep 0.3; echo "ok - slow"'
make_item bad 'echo "ok - c"; echo "not ok - d"; echo "    why"; exit 1'
make_item crash 'echo "ok - e"; kill -SEGV $$'
make_item crash_after_failure 'echo "not ok - f"; kill -SEGV $$'
make_item status 'echo "ok - g"; exit 3'
make_item silent 'exit 0'
make_item lying 'echo "not ok - h"; exit 0'
make_item skipping 'echo "skip - i # no such machine"'
make_item hang 'echo "ok - j"; sleep 30'

expect "passing tests" 0 "3 passed, 0 failed" "^ok - slow" slow good
expect "items are printed in order" 0 "3 passed, 0 failed" "" slow good
[ "$(grep '^ok' "$work/said" | head -n 1)" = "ok - slow" ] && echo "ok - run counts: fixed order" ||
    { echo "not ok - run counts: fixed order" && faults=1; }
expect "a failing test, with its output" 1 "3 passed, 1 failed" "^    why" good bad
expect "a crash is one failed test" 1 "1 passed, 1 failed" "crash: died by signal 11" crash
expect "a crash after a failed test counts too" 1 "0 passed, 2 failed" "signal 11" \
    crash_after_failure
expect "a status without a failed test" 1 "1 passed, 1 failed" "status: ended with status 3" status
expect "a program that runs no test" 1 "2 passed, 1 failed" "silent: ran no test" silent good
expect "a failed test in a program that ends well" 1 "0 passed, 1 failed" "^not ok - h" lying
expect "a skip, with its reason" 0 "2 passed, 0 failed" "^skip - i # no such machine" skipping good
expect "skips alone are no success" 1 "0 passed, 0 failed" "^skip - i" skipping
expect "a hang is ended and counted" 1 "1 passed, 1 failed" "hang: did not end in 1 seconds" hang
expect "an item that is not there" 1 "2 passed, 1 failed" "missing: ended with status 127" missing \
    good
exit $faults
