#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# ended.sh: runs that are told to end, and standard streams that are closed or full.
room=ended
. "$(dirname "$0")/lib.sh"
data=$files/trial.csv

# a fit that takes some seconds: no length is ever enough
sed 's/"curve": "independent"/"curve": "ndlm"/; s/"max_draws": 8000, "precision": 0.02/"max_draws": 2048000, "precision": 0.00001/' \
    "$files/trial.json" >long.json

# told SIGNAL DIRECTORY [OPTION...]: sends the signal while the run computes
told() {
    local signal=$1 dir=$2 pid
    shift 2
    # job control: a job in the background ignores SIGINT without it
    set -m
    "$TERRACE" analyze long.json "$data" -o "$dir" "$@" >out 2>err &
    pid=$!
    set +m
    sleep 0.3
    kill -0 $pid || { echo "ended before it was told to"; return 1; }
    kill -s "$signal" $pid
    wait $pid
    status=$?
}
interrupted() { told INT i/j; ended 130 && absent i && out_empty; }
terminated() { told TERM t; ended 143 && absent t && out_empty; }
keeps_old() {
    run analyze "$files/trial.json" "$data" -o k; ended 0 || return 1
    cp -r k k.before
    told TERM k --force; ended 143 && diff -r k k.before
}
# A reader that goes away: told by SIGPIPE, or by the failed write where that is ignored.
pipe_closed() {
    ( sleep 0.2; exec "$TERRACE" analyze "$files/trial.json" "$data" -o pc --draws ) 2>err | true
    status=${PIPESTATUS[0]}
    ended 141 && absent pc
}
pipe_ignored() {
    ( trap '' PIPE; sleep 0.2; exec "$TERRACE" analyze "$files/trial.json" "$data" -o pi ) 2>err | true
    status=${PIPESTATUS[0]}
    ended 4 && absent pi && err_has "standard output"
}
stdout_closed() { "$TERRACE" analyze "$files/trial.json" "$data" -o sc >&- 2>err; status=$?; ended 4 && absent sc && err_has "standard output"; }
all_closed() { "$TERRACE" analyze "$files/trial.json" "$data" -o ac <&- >&- 2>&-; status=$?; ended 4 && absent ac; }
closed_and_quiet() { "$TERRACE" analyze "$files/trial.json" "$data" -o cq --quiet <&- >&- 2>&-; status=$?; run analyze "$files/trial.json" "$data" -o cr; [ $status = 0 ] && diff -r cq cr; }
# 4 KiB a file, and the signal for it not ignored
file_limit() { ( ulimit -f 4; exec "$TERRACE" analyze "$files/trial.json" "$data" -o fl >/dev/null 2>err ); status=$?; ended 4 && absent fl; }
no_directory() { run analyze "$files/trial.json" "$data" -o /proc/nowhere/x; ended 4 && err_has "/proc/nowhere" && out_empty; }

try "SIGINT while computing: 130, nothing is left" interrupted
try "SIGTERM while computing: 143, nothing is left" terminated
try "SIGTERM with --force: the old result stays" keeps_old
try "the reader of standard output is gone: 141, nothing is left" pipe_closed
try "the same with SIGPIPE ignored: 4" pipe_ignored
try "standard output is closed" stdout_closed
try "all standard streams are closed" all_closed
try "closed streams and --quiet: the same files" closed_and_quiet
try "a limit to the size of files" file_limit
try "a directory that cannot be made" no_directory
exit $failed
