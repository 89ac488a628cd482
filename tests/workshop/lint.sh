#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# lint.sh: cppcheck and clang's analyzer over the sources given and ISA_SOURCES; any finding is a
# fault. FLAGS: -D and -I words; FIXED: the flags every file is compiled with.
set -u
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
isa=${ISA_SOURCES:-}
faults=0

# shellcheck disable=SC2086 # lists of words, here and below
cppcheck --quiet --std=c11 --language=c --platform=unix64 -j 2 --inline-suppr --error-exitcode=1 \
    --enable=warning,portability,performance --suppress=missingIncludeSystem \
    --suppress=arrayIndexThenCheck --library=tests/workshop/cppcheck.cfg $FLAGS -DISA=sse2 -D__SSE2__ "$@" $isa || faults=1
[ $faults -eq 0 ] && echo "lint: cppcheck found nothing"

for source in "$@" $isa; do echo "$source"; done >"$work/sources"
# The analyzer's exit status does not tell; what it prints does.
xargs -P 2 -I{} clang --analyze --analyzer-output text $FLAGS $FIXED -DISA=sse2 \
    -Xclang -analyzer-checker=security.insecureAPI.rand,security.insecureAPI.strcpy \
    {} <"$work/sources" >"$work/said" 2>&1
status=$?
cat "$work/said"
if [ $status -ne 0 ] || grep -Eq ': (warning|error):' "$work/said"; then
    faults=1
else
    echo "lint: clang --analyze found nothing"
fi
exit $faults
