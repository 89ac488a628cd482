#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# inject.sh: whole runs in which one allocation or one call on files fails. Each ends with status 4,
# a message, and the directory as it was; or with status 0 and the whole result, where the
# call did not matter. INJECTED names the program of inject.c.
#   INJECT_ALL=1   every allocation instead of a sample (hours for selfcheck)
#   INJECT_ONLY=NAME   one command; only so selfcheck
room=inject
. "$(dirname "$0")/../cli/lib.sh"
INJECTED=${INJECTED-$root/build/obj/gcc-plain/tests/inject/terrace}
if [ ! -x "$INJECTED" ]; then
    echo "skip - inject: one failing call # no such program in this build (sanitizers have an allocator of their own)"
    exit 0
fi
export INJECT INJECT_ERRNO INJECT_CALLER= INJECT_REPORT=$work/report
faults=0

hidden() { find out -name '.terrace*' 2>/dev/null | grep -q .; }
wrong() {
    faults=$((faults + 1))
    [ $faults -gt 5 ] || { echo "INJECT=$INJECT ($failed_call), $state: $1"; cat err; }
}

# One run of the command `command` with INJECT set, into a directory that is new or holds a result.
one() {
    local failed_call
    rm -rf out
    [ "$state" = new ] || cp -r earlier out
    "$INJECTED" "${command[@]}" -o out --force --threads 1 >said 2>err </dev/null
    status=$?
    read -r _ _ _ _ _ failed_call <report
    runs=$((runs + 1))
    [ "$failed_call" = nothing ] || injected=$((injected + 1))
    case $status in
    0)
        [ -z "$INJECT_CALLER" ] || wrong "a refused allocation of $INJECT_CALLER passed unseen"
        if [ "$failed_call" = unlinkat ] && hidden; then rm -f out/.terrace*; fi
        diff -r out reference >/dev/null || wrong "status 0, and not the whole result"
        ;;
    4)
        [ -s err ] || wrong "no message"
        if [ "$state" = new ]; then
            [ ! -e out ] || wrong "something is left: $(ls -A out)"
        else
            diff -r out earlier >/dev/null || wrong "the earlier result was touched: $(ls -A out)"
        fi
        ;;
    *) wrong "status $status" ;;
    esac
}

prepare() {
    rm -rf reference earlier
    INJECT= "$INJECTED" "${command[@]}" -o earlier --seed 9 >/dev/null 2>&1 || echo "cannot prepare"
    INJECT= "$INJECTED" "${command[@]}" -o reference --threads 1 >/dev/null 2>&1 || echo "cannot prepare"
    read -r _ allocations _ calls _ <report
    runs=0 injected=0 faults=0
}

# Numbers of allocations: the first and the last ones all, $sample spread between.
numbers() {
    if [ -n "${INJECT_ALL:-}" ]; then
        seq 1 "$allocations"
    else
        { seq 1 10; seq $((allocations - 9)) "$allocations"
          seq 11 $((allocations > 20 ? (allocations - 20) / sample + 1 : 1)) "$allocations"; } |
            awk -v most="$allocations" '$1 >= 1 && $1 <= most' | sort -nu
    fi
}
allocation() {
    prepare
    state=new
    for n in $(numbers); do
        INJECT=alloc:$n one
        state=$([ $state = new ] && echo old || echo new)
    done
    echo "$injected of $runs runs with a refused allocation, of $allocations"
    [ $faults -eq 0 ] && [ $injected -ge $((runs - 2)) ]
}
call() {
    prepare
    for INJECT_ERRNO in 5 28; do
        for state in new old; do
            for ((n = 1; n <= calls; n++)); do INJECT=io:$n one; done
        done
    done
    echo "$injected of $runs runs with a failed call"
    [ $faults -eq 0 ] && [ $injected -ge $((runs * 3 / 4)) ]
}

# each NAME SAMPLE ARGUMENT...
each() {
    local name=$1
    sample=$2
    shift 2
    command=("$@")
    [ -z "${INJECT_ONLY:-}" ] || [ "$INJECT_ONLY" = "$name" ] || return
    try "$name: a refused allocation" allocation
    try "$name: a failed call on files" call
    [ -z "${INJECT_TELL:-}" ] || cat told
}
from_nlopt() { INJECT_CALLER=libnlopt allocation; }
from_gsl() { INJECT_CALLER=libgsl allocation; }
each check 60 check "$files/trial.json"
each analyze 60 analyze "$files/trial.json" "$files/trial.csv" --draws
each fit 40 fit "$root/data_examples/tables/itch_by_dose.csv" --curve emax
if [ -z "${INJECT_ONLY:-}" ]; then
    command=(fit "$root/data_examples/tables/itch_by_dose.csv" --curve emax)
    sample=40
    try "fit: an allocation refused to GSL" from_gsl
    try "fit: an allocation refused to NLopt" from_nlopt
fi
[ "${INJECT_ONLY:-}" != selfcheck ] || each selfcheck 10 selfcheck # takes minutes: .ci/run
exit $failed
