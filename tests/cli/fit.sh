#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# fit.sh: `terrace fit` as a user meets it; published tables to 5 or 6 significant digits through the
# command line (sources: tests/unit/test_likelihood.c).
room=fit
. "$(dirname "$0")/lib.sh"
rats=$root/tests/data/fit/rat42.csv
tables=$root/tests/data/fit

# near NAME KEY VALUE DIGITS [FACTOR]: likelihood_fit's KEY (estimate or se) of parameter NAME, times
# FACTOR, agrees to so many significant digits
near() {
    awk -v name="$1" -v key="$2" -v want="$3" -v digits="$4" -v factor="${5:-1}" '
        /"likelihood_fit"/ { on = 1 }
        on && index($0, "\"name\": \"" name "\"") {
            if (!match($0, "\"" key "\": [-0-9.e]+")) exit 1
            s = substr($0, RSTART, RLENGTH); sub(/.*: /, "", s)
            got = s * factor; off = got - want; if (off < 0) off = -off
            size = want < 0 ? -want : want
            ok = off <= 0.51 * 10 ^ (1 - digits) * size
            if (!ok) print name, key, "is", got, "instead of", want
            exit !ok
        }' out || { echo "not near: $*"; return 1; }
}
rat42() {
    run fit "$rats" --curve logistic --fix E0=0 --json -o r; ended 0 || return 1
    near Emax estimate 72.462237576 8 && near Emax se 1.7340283401 6 &&
        near spread estimate 14.8457774 6 && near spread se 0.759596 5 && near ED50 estimate 38.8673898 6
}
five_doses() {
    run fit "$tables/five_doses.csv" --curve emax --json -o d; ended 0 || return 1
    # per unit residual sd, which is sqrt(95.15134 / 97)
    near ED50 estimate 0.1421812056 6 && near ED50 se 0.255573174 5 1.00966757 &&
        near Emax se 0.3339143894 5 1.00966757 && near E0 se 0.2154333576 5 1.00966757
}
ryegrass() {
    run fit "$tables/ryegrass.csv" --curve sigmoid_emax --better lower --json -o g; ended 0 || return 1
    near h estimate 2.982228666 6 && near h se 0.4584288182 5 && near ED50 estimate 3.057955167 6 && near E0 se 0.1897332604 5
}
beetles() {
    run fit "$tables/beetles.csv" --curve linear --json -o b; ended 0 || return 1
    near slope estimate 34.27032573 6 && near slope se 2.912140071 5 && near E0 se 5.180711463 5 && out_has '"log_likelihood": -18.7151347'
}
nile() {
    run fit "$tables/nile.csv" --curve ndlm --json -o n; ended 0 || return 1
    near drift_variance estimate 1469.1764 6 && near variance estimate 15098.518 6 && out_has '"log_likelihood": -632.545625'
}
default_place() { cp "$rats" .; run fit rat42.csv --curve linear; ended 0 && [ "$(ls rat42-fit | tr '\n' ' ')" = "fit.json report.html " ] && err_has "rat42-fit/report.html" && out_has "Parameters: likelihood and posterior"; }
json_is_the_file() { run fit "$rats" --curve linear --json -o j; ended 0 && cmp out j/fit.json && out_has '"kind": "fit"' && out_has '"design": null'; }
same_bytes() { run fit "$rats" --curve emax --json --threads 1 -o s1; cp out a; TERRACE_ISA=sse2 run fit "$rats" --curve emax --json --threads 3 -o s2; cmp a out && cmp s1/report.html s2/report.html; }
model_file() {
    echo '{"curve": "ndlm", "order": 2, "priors": {"sd": {"half_normal": {"sd": 3}}}}' >m.json
    run fit "$rats" --model m.json --json -o m; ended 0 && out_has '"order": 2' && out_has '"name": "slope"'
}
model_faults() {
    printf '{"curve": "ndlm",\n "order": 7, "priors": {"ED50": {"fixed": {"value": 1}}}}\n' >m.json
    run fit "$rats" --model m.json -o mf; ended 2 && err_has "m.json: /order" && err_has "m.json: /priors/ED50" && absent mf
}
model_syntax() { printf '{"curve": "ndlm",\n "order" 7}\n' >m.json; run fit "$rats" --model m.json -o ms; ended 2 && err_has "m.json:2:" && absent ms; }
curve_unknown() { run fit "$rats" --curve emaks -o cu; ended 2 && err_has "--curve emaks" && err_has "emax" && absent cu; }
curve_and_model() { echo '{"curve":"emax"}' >m.json; run fit "$rats" --curve emax --model m.json -o cm; ended 2 && err_has "--curve CURVE and --model FILE"; run fit "$rats" -o cm; ended 2 && absent cm; }
fix_faults() { run fit "$rats" --curve emax --fix E0 --fix "sd=1" --fix "sd=2" --fix h=1 -o ff; ended 2 && err_has "--fix E0:" && err_has "--fix sd=2" && err_has '/priors/h' && absent ff; }
words_faults() { run fit "$rats" --curve emax --endpoint counts --better up -o wf; ended 2 && err_has "--endpoint counts" && err_has "--better up" && absent wf; }
table_faults() {
    printf 'level,response\n1,2\nx,3\n2,y\n3,\n' >bad.csv
    run fit bad.csv --curve linear -o tf; ended 2 && err_has "bad.csv:3:" && err_has "bad.csv:4:" && err_lines 2 && absent tf
}
group_faults() {
    printf 'level,n,mean,sd\n1,2,3,\n1,2.5,3,1\n2,4,m,1\n1,1,2,\n' >bad.csv
    run fit bad.csv --curve linear -o gf; ended 2 && err_has "bad.csv:2: sd" && err_has "bad.csv:3: n" && err_has "bad.csv:4: the mean" && err_has "bad.csv:5: level 1 stands on line" && absent gf
}
events_faults() { printf 'level,n,events\n1,5,6\n2,5,1\n' >bad.csv; run fit bad.csv --curve linear -o ef; ended 2 && err_has "bad.csv:2: events"; run fit bad.csv --curve linear --endpoint continuous -o ef; ended 2 && err_has '--endpoint continuous does not suit the column "events"' && absent ef; }
header_faults() {
    printf 'dose,response\n1,2\n' >bad.csv; run fit bad.csv --curve linear -o hf; ended 2 && err_has "level,response (rows)" || return 1
    printf 'level,response,n\n1,2,3\n' >bad.csv; run fit bad.csv --curve linear -o hf; ended 2 && err_has "not both" || return 1
    printf 'level,n,mean,sd,events\n1,2,3,4,1\n' >bad.csv; run fit bad.csv --curve linear -o hf; ended 2 && err_has "one endpoint" || return 1
    printf 'level,response\n' >bad.csv; run fit bad.csv --curve linear -o hf; ended 2 && err_has "no row" || return 1
    printf 'level,response\n1,2\n1,3\n' >bad.csv; run fit bad.csv --curve linear -o hf; ended 2 && err_has "2 levels or more" || return 1
    printf 'level,response\n1,\n2,\n' >bad.csv; run fit bad.csv --curve linear -o hf; ended 2 && err_has "no row has a response" || return 1
    printf 'level,response\n1,0\n2,0.5\n' >bad.csv; run fit bad.csv --curve linear --endpoint binary -o hf; ended 2 && err_has "must be 0 or 1" || return 1
    { echo level,response; for i in $(seq 130); do echo "$i,1"; done; } >bad.csv; run fit bad.csv --curve linear -o hf; ended 2 && err_has "at most 128" && absent hf
}
levels_that_do_not_suit() { printf 'level,response\n-1,2\n2,3\n3,4\n' >neg.csv; run fit neg.csv --curve emax -o ld; ended 2 && err_has "below 0" && absent ld; }
rows_without_response() { printf 'level,response\n0,1\n0,2\n1,\n1,3\n2,4\n' >gaps.csv; run fit gaps.csv --curve linear --json -o rw; ended 0 && out_has '"left_out": 1' && out_has '"subjects": 4'; }
binary_rows() { printf 'level,response\n0,0\n0,1\n0,0\n1,1\n1,0\n1,1\n2,1\n2,1\n2,0\n' >bin.csv; run fit bin.csv --curve linear --endpoint binary --json -o br; ended 0 && out_has '"endpoint": "binary"' && out_has '"events": 1'; }
no_maximum() { printf 'level,n,mean,sd\n0,20,0,1\n10,20,1,1\n20,20,2,1\n30,20,3.2,1\n' >st.csv; run fit st.csv --curve emax -o nm; ended 0 && out_has "There are no likelihood estimates. ED50 runs off" && grep -q '"converged": false' nm/fit.json; }
stdout_full() { "$TERRACE" fit "$rats" --curve linear -o sf >/dev/full 2>err; status=$?; ended 4 && absent sf; }

try "Rat42, certified" rat42
try "five dose means" five_doses
try "ryegrass" ryegrass
try "beetles" beetles
try "Nile as a local level" nile
try "default directory" default_place
try "--json is the file" json_is_the_file
try "same bytes whatever the threads and the instruction set" same_bytes
try "--model" model_file
try "faults of a model file, by pointer" model_faults
try "syntax of a model file, by line" model_syntax
try "unknown curve, nearest name" curve_unknown
try "--curve and --model exclude each other" curve_and_model
try "faults of --fix" fix_faults
try "faults of --endpoint and --better" words_faults
try "faults of rows, all in one run" table_faults
try "faults of groups" group_faults
try "faults of events" events_faults
try "faults of headers and whole tables" header_faults
try "levels that do not suit the curve" levels_that_do_not_suit
try "rows without a response are counted" rows_without_response
try "rows of a binary endpoint" binary_rows
try "no maximum, in plain words" no_maximum
try "standard output full" stdout_full
exit $failed
