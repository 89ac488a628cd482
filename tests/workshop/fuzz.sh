#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# fuzz.sh: runs fuzz targets, FUZZ_SECONDS (60) each, from the committed corpus and from what
# earlier runs found (WORK/NAME/found). An input that breaks something is kept in WORK/NAME.
#   fuzz.sh WORK PROGRAM...   (programs are called .../fuzz_NAME)
set -u
work=$1
shift
faults=0
for program; do
    name=${program##*/fuzz_}
    mkdir -p "$work/$name/found"
    ASAN_OPTIONS=${ASAN_OPTIONS:-} "$program" -max_total_time="${FUZZ_SECONDS:-60}" -timeout=10 \
        -max_len=8192 -dict="tests/fuzz/$name.dict" -artifact_prefix="$work/$name/" \
        -print_final_stats=1 -verbosity=0 "$work/$name/found" "tests/fuzz/corpus/$name" \
        >"$work/$name/said" 2>&1
    status=$?
    inputs=$(sed -n 's/^stat::number_of_executed_units: *//p' "$work/$name/said")
    if [ $status -eq 0 ]; then
        echo "fuzz: $name: ${inputs:-0} inputs, clean"
    else
        echo "fuzz: $name: broken after ${inputs:-an unknown number of} inputs (status $status); the input is in $work/$name/"
        tail -n 60 "$work/$name/said"
        faults=1
    fi
done
exit $faults
