#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# analyze.sh: `terrace analyze` as a user meets it.
room=analyze
. "$(dirname "$0")/lib.sh"
d=$files/trial.json
data=$files/trial.csv

default_place() {
    run analyze "$d" "$data"
    ended 0 && [ "$(ls -A trial-analyze | sort | tr '\n' ' ')" = "analysis.json report.html " ] || return 1
    [ -s out ] && err_has "trial-analyze/report.html"
}
owner_only() { run analyze "$d" "$data" -o p --draws; ended 0 && [ "$(stat -c %a p/* | sort -u)" = 600 ]; }
json_is_the_file() { run analyze "$d" "$data" --json -o j; ended 0 && cmp out j/analysis.json && out_has '"analysis": 1'; }
quiet() { run analyze "$d" "$data" --quiet -o q; ended 0 && out_empty && err_empty && [ -s q/report.html ]; }
draws() { run analyze "$d" "$data" --draws -o w; ended 0 && head -n 1 w/draws.csv | grep -q '^chain,draw,' && [ "$(wc -l <w/draws.csv)" = 8001 ]; }
refuses() { run analyze "$d" "$data" -o r; ended 0 && cp r/analysis.json before && run analyze "$d" "$data" -o r --seed 2 && ended 2 && cmp before r/analysis.json && err_has "--force"; }
force() {
    run analyze "$d" "$data" -o f --draws; echo mine >f/other.txt
    run analyze "$d" "$data" -o f --force --seed 2
    ended 0 && grep -q '"seed": 2' f/analysis.json && absent f/draws.csv && [ "$(cat f/other.txt)" = mine ]
}
threads() { run analyze "$d" "$data" --json --threads 1 -o t1; cp out a; run analyze "$d" "$data" --json --threads 4 -o t4; cmp a out && cmp t1/report.html t4/report.html; }
isa() { TERRACE_ISA=sse2 run analyze "$d" "$data" --json -o i1; cp out a; run analyze "$d" "$data" --json -o i2; ended 0 && cmp a out; }
by() { run analyze "$d" "$data" --by "A. Reader <x>" --json -o b; ended 0 && out_has '"by": "A. Reader <x>"' && ! grep -q 'Reader <x>' b/report.html; }
by_control_characters() { run analyze "$d" "$data" --by "$(printf 'a\nb')" -o b2; ended 2 && absent b2; }
which_excludes() { run analyze "$d" "$data" --analysis 1 --final -o x; ended 2 && err_has "exclude each other" && absent x; }
number_given() { run analyze "$d" "$data" --analysis 2 --json -o n; ended 0 && out_has '"analysis": 2'; }
number_too_large() { run analyze "$d" "$data" --analysis 3 -o n3; ended 2 && absent n3; }
pending_final() { run analyze "$d" "$data" --final -o pf; ended 2 && err_has "pending" && absent pf; }
pending_ok() { run analyze "$d" "$data" --final --pending-ok --json -o po; ended 0 && out_has '"final": true'; }
closed() { run analyze "$d" "$data" --close "10 mg" --json -o c; ended 0 && grep -A30 '"label": "10 mg"' out | grep -m 1 next_share | grep -q '"next_share": 0'; }
close_unknown() { run analyze "$d" "$data" --close "11 mg" --close Placebo -o c2; ended 2 && err_has "--close 11 mg" && err_has "--close Placebo" && absent c2; }
close_all() { run analyze "$d" "$data" --close "10 mg" --close "20 mg" -o c3; ended 2 && err_has "at least one active level"; }
cut_too_early() { run analyze "$d" "$data" --cut 3 -o cut; ended 2 && err_has "trial.csv:" && absent cut; }
all_faults() {
    sed 's/"higher"/"up"/; s/"subjects": 60/"subjects": -1/' "$d" >bad.json
    printf 'subject,level,response\n1,"Pla\n' >bad.csv
    run analyze bad.json bad.csv --final --analysis 1 --seed x -o af
    ended 2 && err_has "/endpoint/better" && err_has "/subjects" && err_has "bad.csv:" && err_has "--seed" && err_has "exclude each other" && out_empty && absent af
}
data_and_directory() {
    run analyze "$d" "$data" -o dd; ended 0 || return 1
    sed 's/^3,20 mg/3,25 mg/; s/^4,20 mg,1,4.1/4,20 mg,1,four/' "$data" >wrong.csv
    run analyze "$d" wrong.csv -o dd
    ended 2 && err_has "wrong.csv:4:" && err_has "wrong.csv:5:" && err_has "dd" && err_lines 3
}
missing_data() { run analyze "$d" none.csv -o md; ended 2 && err_has "none.csv" && absent md; }
stdout_full() { "$TERRACE" analyze "$d" "$data" -o sf >/dev/full 2>err; status=$?; ended 4 && absent sf && err_has "standard output"; }
# A limit of 4 KiB a file stands for a full disk.
disk_full() {
    ( trap '' XFSZ; ulimit -f 4; exec "$TERRACE" analyze "$d" "$data" -o df >/dev/null 2>err ); status=$?
    ended 4 && absent df
}
disk_full_keeps_old() {
    run analyze "$d" "$data" -o dk; ended 0 || return 1
    cp -r dk dk.before
    ( trap '' XFSZ; ulimit -f 4; exec "$TERRACE" analyze "$d" "$data" -o dk --force --seed 3 >/dev/null 2>err ); status=$?
    ended 4 && diff -r dk dk.before
}
sensitivity() {
    sed 's/"subjects": 60/"sensitivity": [{"curve": "linear"}, {"curve": "ndlm"}], "subjects": 60/' "$d" >sens.json
    run analyze "$d" "$data" --json -o s0; cp out plain
    run analyze sens.json "$data" --json -o s1; ended 0 && out_has '"decides": false' && out_has '"curve": "ndlm"' || return 1
    # what decides is the same with and without them
    sed '/"sensitivity"/,$d; /sha256/d' plain >deciding0; sed '/"sensitivity"/,$d; /sha256/d' out >deciding1
    cmp deciding0 deciding1 && [ -s deciding0 ] && grep -q 'Other models' s1/report.html && ! grep -q 'Other models' s0/report.html
}
# No spread within the levels: a prior on sd that does not vanish at 0 may leave no posterior.
sensitivity_that_fails() {
    local prior='"priors": {"variance": {"inverse_gamma": {"shape": 2, "scale": 2}}}'
    printf 'subject,level,response\n1,A,1\n2,A,1\n3,B,2\n4,B,2\n5,B,2\n' >flat.csv
    cat >flat.json <<END
{"terrace": 1, "title": "t", "levels": {"control": "A", "list": [{"label": "A", "value": 0}, {"label": "B", "value": 1}]},
 "endpoint": {"name": "y", "type": "continuous", "better": "higher", "range": [0, 10]},
 "model": {"curve": "linear", $prior}, "sensitivity": [{"curve": "independent"}], "subjects": 10, "analyses": {"at": [5]}}
END
    run analyze flat.json flat.csv -o sf1
    ended 0 && out_has "1: independent (not fitted)" && out_has "Sensitivity model 1 could not be fitted" && grep -q '"trusted": true' sf1/analysis.json
}
no_escapes() { run analyze "$d" "$data" -o ne; ! grep -q "$(printf '\033')" out err; }
progress() { run analyze "$d" "$data" -o pr --progress; ended 0 && err_has "14 subjects read"; }
nothing_private() { run analyze "$d" "$data" -o np; ended 0 && ! grep -rqF "$work" np && ! grep -rqF "$(hostname)" np; }

try "default directory" default_place
try "readable by the owner only" owner_only
try "--json is the bytes of the file" json_is_the_file
try "--quiet" quiet
try "--draws" draws
try "refuses a finished directory" refuses
try "--force removes only this command's files" force
try "same bytes with 1 and 4 threads" threads
try "same bytes with TERRACE_ISA=sse2" isa
try "--by is kept and escaped" by
try "--by without control characters" by_control_characters
try "--analysis and --final exclude each other" which_excludes
try "--analysis K" number_given
try "--analysis beyond the plan" number_too_large
try "--final with pending subjects" pending_final
try "--pending-ok" pending_ok
try "--close" closed
try "--close of an unknown level and of the control" close_unknown
try "--close of every active level" close_all
try "--cut before the data" cut_too_early
try "faults of design, data and options in one run" all_faults
try "faults of data and directory in one run" data_and_directory
try "no such data" missing_data
try "standard output is full: nothing is left" stdout_full
try "disk full: nothing is left" disk_full
try "disk full: the old result stays" disk_full_keeps_old
try "sensitivity models stand beside" sensitivity
try "a sensitivity model that fails is a note" sensitivity_that_fails
try "no escapes when redirected" no_escapes
try "--progress" progress
try "no path or machine in a result" nothing_private
exit $failed
