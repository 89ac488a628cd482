#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# prior_edges.sh: `terrace check` with priors at the edge of what is allowed, and beyond.
room=prior-edges
. "$(dirname "$0")/lib.sh"

# with PRIORS: the smallest design with these priors
with() {
    sed 's|"curve": "emax"|"curve": "independent", "priors": '"$1"'|' \
        "$root/tests/designs/good/minimal.json" >d.json
}

vague_variance() {
    with '{"variance": {"inverse_gamma": {"shape": 0.001, "scale": 0.001}}}'
    run check d.json --json
    ended 0 && out_has '"q95": null' && run check d.json && ended 0 && out_has "on the variance"
}
beyond_numbers() {
    with '{"theta": {"lognormal": {"meanlog": 1000, "sdlog": 1}}}'
    run check d.json --json
    [ "$status" -lt 3 ] || { echo "status $status"; cat err; return 1; }
}
shapes_out_of_range() {
    with '{"theta": {"student_t": {"df": 1e7, "location": 0, "scale": 5}}, "variance": {"inverse_gamma": {"shape": 0.0001, "scale": 1}}}'
    run check d.json
    ended 2 && err_lines 2 && err_has "/theta/student_t/df: 10000000 is out of range" &&
        err_has "inverse_gamma/shape: 0.0001 is out of range"
}
cut_prior() {
    with '{"theta": {"normal": {"mean": 0, "sd": 1, "above": 8}}}'
    run check d.json
    ended 0 && out_has "normal, mean 0, sd 1, above 8   8.006  8.085  8.361"
}

try "a vague inverse gamma variance whose quantiles leave all numbers" vague_variance
try "a prior beyond all numbers ends without a crash" beyond_numbers
try "shapes and degrees of freedom outside their range are refused" shapes_out_of_range
try "a normal cut far in its tail" cut_prior
exit $failed
