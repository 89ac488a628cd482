#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# manual.sh: every command and option of --help is in the manual page and the completion, which man and
# bash accept.
set -u
cd "$(dirname "$0")/../.." || exit 1
terrace=${TERRACE:-build/terrace}
where=$(dirname "$terrace")
failed=0
say() { if [ "$1" = 0 ]; then echo "ok - manual: $2"; else echo "not ok - manual: $2"; failed=1; fi; }
[ -s "$where/terrace.1" ] && [ -s "$where/terrace.bash" ] || { echo "not ok - manual: make wrote them"; exit 1; }

missing=0
for command in $("$terrace" --help | sed -n '/^Commands/,/^$/s/^  \([a-z]*\) .*/\1/p'); do
    grep -q "^\.SS $command" "$where/terrace.1" && grep -q "^    $command)" "$where/terrace.bash" || { echo "# no $command"; missing=1; }
    for option in $("$terrace" "$command" --help | grep -o '^  [-a-z, ]*--[a-z-]*' | grep -o -- '--[a-z-]*'); do
        escaped=${option//-/\\\\-}
        grep -q -- "$escaped" "$where/terrace.1" && grep -q -- " $option[ \"]" "$where/terrace.bash" || { echo "# no $option of $command"; missing=1; }
    done
done
say $missing "every command and option is in both"

bash -n "$where/terrace.bash" && bash -c ". '$where/terrace.bash'; COMP_WORDS=(terrace analyze --dr); COMP_CWORD=2; _terrace; [ \"\${COMPREPLY[*]}\" = --draws ]"
say $? "the completion completes"

if command -v man >/dev/null && command -v groff >/dev/null; then
    warnings=$(LC_ALL=C.UTF-8 MANROFFSEQ='' man --warnings=w -l "$where/terrace.1" 2>&1 >/dev/null)
    [ -z "$warnings" ]; say $? "man takes the page without a warning"
else
    echo "skip - manual: man takes the page without a warning # man is not installed"
fi
exit $failed
