#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# check.sh: `terrace check` as a user meets it.
room=check
. "$(dirname "$0")/lib.sh"
d=$files/trial.json

words() {
    run check "$d"
    ended 0 && err_empty && [ "$(ls -A | grep -vcE '^(out|err|told)$')" = 0 ] || return 1
    local part
    for part in Question Levels Endpoint "Model and priors" "What the priors imply" Targets Allocation \
        Analyses Decisions Scenarios Reminders "normal, mean 0, sd 10" "meets MED" \
        "exceeds 0.975" "2 weeks" "expected at analysis"; do
        grep -q -- "$part" out || { echo "no '$part'"; return 1; }
    done
}
# 3 subjects a week: 12 randomized at week 4, 0.95 x 6 observed (week 2), 0.05 x 3 x ... dropped.
expected_counts() { run check "$d"; ended 0 && grep -Eq '1, at 12 randomized +4\.0 +12 +6 ' out || { grep -A4 'expected at' out; return 1; }; }
true_targets() { run check "$d"; grep -Eq 'true MED +none +20 mg' out && grep -Eq 'true best +10 mg +20 mg' out || { grep true out; return 1; }; }
quiet() { run check "$d" --quiet; ended 0 && out_empty && err_empty; }
json_is_the_file() { run check "$d" --json --out o1; ended 0 && cmp out o1/check.json && [ "$(ls -A o1)" = check.json ]; }
json_without_out() { run check --json "$d"; ended 0 && out_has '"kind": "check"' && absent trial-check; }
json_parses() { run check --json "$d"; cp out c.json; run check c.json; ended 2 && ! grep -E '^c\.json:[0-9]+:' err; }
refuses() { run check "$d" -o o2; ended 0 && cp o2/check.json before && run check "$d" -o o2 --seed 9 && ended 2 && cmp o2/check.json before; }
force() { run check "$d" -o o3; echo mine >o3/other.txt; run check "$d" -o o3 --seed 9 --force; ended 0 && grep -q '"seed": 9' o3/check.json && [ "$(cat o3/other.txt)" = mine ]; }
schema() { run check --schema; ended 0 && cp out s.json && out_has "2020-12" && run check s.json && ended 2 && ! grep -E '^s\.json:[0-9]+:' err; }
schema_and_design() { run check --schema "$d"; ended 2 && err_has "unexpected argument"; }
all_faults() { sed 's/"higher"/"up"/; s/"subjects": 60/"subjects": -1/; s/"terrace": 1/"terrace": 2/' "$d" >bad.json; run check bad.json -o o4; ended 2 && err_lines 3 && err_has "bad.json: /endpoint/better" && err_has "bad.json: /subjects" && out_empty && absent o4; }
syntax() { printf '{"terrace": 1,\n "title": }\n' >s2.json; run check s2.json; ended 2 && err_has "s2.json:2:" ; }
no_such_file() { run check missing.json; ended 2 && err_has "missing.json" && err_lines 1; }
a_directory() { run check /tmp; ended 2 && err_has "/tmp"; }
stdout_full() { "$TERRACE" check "$d" -o o5 >/dev/full 2>err; status=$?; ended 4 && absent o5/check.json && err_has "standard output"; }
cannot_make_out() { run check "$d" --out /proc/terrace-out; ended 4 && out_empty; }
no_escapes() { run check "$d"; ! grep -q "$(printf '\033')" out; }
# A terminal of its own, through script(1).
on_terminal() { TERM=xterm script -qec "'$TERRACE' check '$d'" /dev/null </dev/null >tty 2>&1; grep -q "$(printf '\033')" tty; }
no_color() { NO_COLOR=1 TERM=xterm script -qec "'$TERRACE' check '$d'" /dev/null </dev/null >tty 2>&1; grep -q Question tty && ! grep -q "$(printf '\033')" tty; }
same_bytes() { run check "$d" --json; cp out a; run check "$d" --json --threads 3; cmp a out; }

try "the design in words" words
try "expected counts" expected_counts
try "true target levels of scenarios" true_targets
try "--quiet" quiet
try "--json is the bytes of the file" json_is_the_file
try "--json writes no file without --out" json_without_out
try "check.json is JSON" json_parses
try "refuses a finished directory" refuses
try "--force removes only this command's files" force
try "the schema is JSON" schema
try "--schema takes no design" schema_and_design
try "all faults in one run, nothing written" all_faults
try "a syntax fault has its line" syntax
try "no such file" no_such_file
try "a directory instead of a design" a_directory
try "standard output is full: no file is left" stdout_full
try "a directory that cannot be made" cannot_make_out
try "no escapes when redirected" no_escapes
if script -qec true /dev/null </dev/null >/dev/null 2>&1; then
    try "headings are set off on a terminal" on_terminal
    try "NO_COLOR" no_color
else
    echo "skip - $room: headings on a terminal, NO_COLOR # script(1) finds no pseudo-terminal here"
fi
try "same bytes" same_bytes
exit $failed
