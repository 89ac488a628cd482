#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# selfcheck.sh: `terrace selfcheck` as a user meets it.
room=selfcheck
. "$(dirname "$0")/lib.sh"
all() { run selfcheck; ended 0 && out_has "checks passed, 0 failed" && out_has "rat42: passed" && err_empty && [ -z "$(ls -A | grep -vx -e out -e err -e told)" ]; }
evidence() {
    run selfcheck --out e --json; ended 0 && cmp out e/selfcheck.json && [ -s e/report.html ] || return 1
    out_has '"kind": "selfcheck"' && out_has "$(cd "$root" && sh tests/workshop/source_hash.sh | grep -o '[0-9a-f]\{64\}')" && out_has '"failed": 0'
}
same_bytes() { run selfcheck --json; cp out a; run selfcheck --json --threads 2; cmp a out; }
instruction_sets() { TERRACE_ISA=sse2 run selfcheck; ended 0 && out_has "sse2"; }
refuses() { mkdir r; echo '{}' >r/selfcheck.json; run selfcheck --out r; ended 2 && err_has "--force" && [ "$(cat r/selfcheck.json)" = '{}' ]; }
argument() { run selfcheck x; ended 2 && err_has "unexpected argument"; }
quiet() { run selfcheck --quiet; ended 0 && out_empty && err_empty; }
stdout_full() { "$TERRACE" selfcheck --out sf >/dev/full 2>err; status=$?; ended 4 && absent sf; }
try "every check passes" all
try "evidence in files" evidence
try "the same bytes twice" same_bytes
try "SSE2" instruction_sets
try "a finished directory is kept" refuses
try "no argument" argument
try "--quiet" quiet
try "standard output full" stdout_full
exit $failed
