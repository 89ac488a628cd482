#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# golden.sh: the bytes of analysis.json against committed SHA-256 values, over instruction sets,
# threads and with the C library's own choice of code paths masked. `golden.sh --redo` writes the values
# anew. TERRACE names the program (built by whichever compiler).
set -u
cd "$(dirname "$0")/../.." || exit 1
terrace=${TERRACE:-build/terrace}
values=tests/golden/sha256.txt
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
bash tests/golden/designs.sh "$work" || exit 1

# every case: NAME DESIGN DATA
cases() {
    for design in "$work"/*.json; do
        local name kind
        name=$(basename "$design" .json)
        kind=${name##*-}
        echo "$name $design $work/$kind.csv"
        echo "$name-sparse $design $work/sparse-$kind.csv"
    done
    for example in itch antibiotic_days; do
        echo "$example data_examples/$example/design.json data_examples/$example/interim.csv"
    done
}

sums() { # the environment and options of a run come from the caller
    cases | while read -r name design data; do
        case $name in
        itch | antibiotic_days) which=() ;;
        *) which=(--analysis 1) ;;
        esac
        rm -rf "$work/out"
        "$terrace" analyze "$design" "$data" "${which[@]}" --out "$work/out" --quiet "$@" 2>/dev/null
        status=$?
        [ $status -eq 0 ] || [ $status -eq 3 ] || { echo "status-$status  $name"; continue; }
        echo "$(sha256sum <"$work/out/analysis.json" | cut -d' ' -f1)  $name"
        echo "$(sha256sum <"$work/out/report.html" | cut -d' ' -f1)  $name.html"
    done
}

if [ "${1:-}" = --redo ]; then
    sums --threads 1 >"$values"
    exit 0
fi

failed=0
compare() { # TEST-NAME FILE
    if cmp -s "$values" "$2"; then
        echo "ok - golden: $1"
    else
        echo "not ok - golden: $1"
        failed=1
        diff "$values" "$2" | head -20
    fi
}

TERRACE_ISA=sse2 sums --threads 1 >"$work/a"
compare "SSE2, one thread" "$work/a"
if grep -qw avx2 /proc/cpuinfo; then
    TERRACE_ISA=avx2 sums --threads 4 >"$work/b"
    compare "AVX2, four threads" "$work/b"
else
    echo "skip - golden: AVX2, four threads # this processor has no AVX2"
fi
GLIBC_TUNABLES=glibc.cpu.hwcaps=-AVX512F,-AVX512VL,-AVX2_Usable,-AVX2,-FMA_Usable,-FMA,-AVX_Fast_Unaligned_Load \
    sums --threads 2 >"$work/c"
compare "the C library's dispatch masked" "$work/c"
exit $failed
