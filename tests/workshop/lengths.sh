#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# lengths.sh: reports functions over 100 lines and files over 500, and how long functions are.
# A function is what stands between a `{` and a `}` in the first column (the house's format).
export LC_ALL=C
awk '
    FNR == 1 { if (file != "" && lines > 500) print file ": " lines " lines"; file = FILENAME; body = 0 }
    { lines = FNR }
    /^[A-Za-z_].*\(/ { name = $0; sub(/\(.*/, "", name); sub(/.*[ *]/, "", name) }
    /^\{/ { start = FNR; body = 1 }
    /^\}/ && body {
        body = 0
        count[FNR - start - 1]++; functions++
        if (FNR - start - 1 > longest) longest = FNR - start - 1
        if (FNR - start - 1 > 50) over50++
        if (FNR - start - 1 > 100) print FILENAME ":" start ": " name " has " FNR - start - 1 " lines"
    }
    END {
        if (lines > 500) print file ": " lines " lines"
        for (i = 0; i <= longest && seen * 2 < functions; i++) { seen += count[i]; median = i }
        printf "%d functions: median %d lines, longest %d, %d over 50\n", functions, median, longest, over50
    }' "$@"
