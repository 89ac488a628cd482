#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# headers.sh: each header given compiles alone, under gcc and clang, without a warning.
# FLAGS: the compiler flags.
set -u
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
faults=0
for compiler in gcc clang; do
    for header; do
        # the declaration keeps the unit from being empty
        printf '#include "%s"\ntypedef int headers_unit;\n' "$header" >"$work/unit.c"
        # shellcheck disable=SC2086 # a list of words
        if ! $compiler $FLAGS -Werror -Wno-unused-function -DISA=sse2 -fsyntax-only "$work/unit.c" \
            2>"$work/said"; then
            echo "headers: $header does not compile alone under $compiler:"
            cat "$work/said"
            faults=$((faults + 1))
        fi
    done
done
[ $faults -eq 0 ] && echo "headers: $# headers, gcc and clang"
