#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# cover.sh OBJECT-DIRECTORY: lines and branches taken by the tests, file by file and in all, from gcov.
set -u
dir=$(cd "$1" && pwd) || exit 1
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
root=$PWD
cd "$work" || exit 1
find "$dir" -name '*.gcda' -path '*/src/*' -o -name '*.gcda' -path '*/models/*' |
    while read -r f; do gcov -b -c -s "$root" -o "$(dirname "$f")" "$f" 2>/dev/null; done >all
awk '
    /^File / { file = $2; gsub(/\x27/, "", file); keep = file ~ /^(src|models)\// || file ~ /\/(src|models)\//; next }
    keep && /^Lines executed:/ { split($0, a, /[:% ]+/); if (a[3] / 100 * a[5] >= lines[file] * 1) { n[file] = a[5]; lines[file] = a[3] / 100 * a[5] } }
    keep && /^Taken at least once:/ { split($0, a, /[:% ]+/); b = a[5] / 100 * a[7]; if (b >= taken[file] * 1) { branches[file] = a[7]; taken[file] = b } }
    END {
        for (f in n) {
            printf "%6.1f%% of %4d lines  %6.1f%% of %4d branches  %s\n", n[f] ? 100 * lines[f] / n[f] : 0, n[f],
                branches[f] ? 100 * taken[f] / branches[f] : 100, branches[f], f
            L += lines[f]; N += n[f]; T += taken[f]; B += branches[f]
        }
        printf "%6.1f%% of %4d lines  %6.1f%% of %4d branches  ~ in all\n", 100 * L / N, N, B ? 100 * T / B : 100, B
    }' all | sort -k7
