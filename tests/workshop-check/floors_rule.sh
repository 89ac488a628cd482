#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# floors_rule.sh: the proof of the floors sees each kind of broken rule, in a small house made here.
set -u
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
faults=0
script=$PWD/tests/workshop/floors.sh

house() {
    rm -rf "$work/house"
    mkdir -p "$work/house/src/base" "$work/house/src/design" "$work/house/models"
    cd "$work/house" || exit 1
    echo '#include <stddef.h>' >src/base/mem.h
    echo '#include "base/mem.h"' >src/base/mem.c
    echo '#include "base/mem.h"' >src/base/text.h
    echo '#include "base/text.h"' >src/design/curve.h
    echo '#include "design/curve.h"' >models/emax.c
    printf '%s\n' "floor 0 src/base" "floor 1 src/design models" "0 src/base/mem" \
        "0 src/base/text" "1 src/design/curve" "1 models/emax" >list
}
# expect NAME STATUS PATTERN
expect() {
    local said status
    said=$(LIST=list bash "$script" ${update:-} 2>&1)
    status=$?
    if [ $status -eq "$2" ] && printf '%s\n' "$said" | grep -q "$3"; then
        echo "ok - floors: $1"
    else
        echo "not ok - floors: $1"
        printf '    status %s, expected %s and: %s; it printed:\n' $status "$2" "$3"
        printf '%s\n' "$said" | sed 's/^/    | /'
        faults=1
    fi
}

house
expect "a house in order" 0 "4 rooms, 4 includes"
house && echo '#include "design/curve.h"' >>src/base/mem.c
expect "an include of a floor above" 1 "mem.c (floor 0) includes src/design/curve.h of floor 1"
house && echo '# include "base/text.h"' >>src/base/mem.c
expect "an include of a later room" 1 "mem.c includes src/base/text.h, which stands later"
house && echo >src/design/prior.c
expect "a file that is not listed" 1 "src/design/prior.c is not listed"
house && rm models/emax.c
expect "a listed file that is not there" 1 "lists models/emax, which is not there"
house && echo >models/text.c && echo "1 models/text" >>list
expect "a base name used twice" 1 "base name text is used twice"
house && echo '#include "text.h"' >>src/design/curve.h
expect "an include without its folder" 1 "includes src/text.h, which is on no floor"
house && sed -i 's/^1 models/0 models/' list
expect "a file on a floor that is not its own" 1 "models/emax does not belong on floor 0"
update=--update
house && echo '#include "design/rules.h"' >src/design/prior.h && echo >src/design/rules.h
expect "a new file finds its place" 0 "6 rooms, 5 includes"
house && echo '#include "base/text.h"' >>src/base/mem.h
expect "headers that include each other" 1 "on floor 0 these include each other"
exit $faults
