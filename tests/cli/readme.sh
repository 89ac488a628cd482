#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# readme.sh: every command of README.md that starts with build/terrace works as written.
room=readme
. "$(dirname "$0")/lib.sh"

mkdir build
ln -s "$TERRACE" build/terrace
ln -s "$root/data_examples" data_examples

# Lines of fenced blocks, joined where they end with a backslash.
awk '/^ *```/ { inside = !inside; next } inside' "$root/README.md" |
    sed -e :a -e '/\\$/N; s/\\\n//; ta' | sed 's/^ *\$ //; s/^ *//' |
    grep '^build/terrace' >commands

works() { bash -c "$line" >told.out 2>&1 || { echo "status $?"; cat told.out; return 1; }; }

[ -s commands ] || { echo "not ok - $room: README.md shows commands"; exit 1; }
while IFS= read -r line <&3; do
    try "$line" works
done 3<commands
exit $failed
