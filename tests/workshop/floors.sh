#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# floors.sh: proves the order of the house, which stands in floors.txt: every file is listed once,
# base names are unique, and an include points to an earlier file of the same floor or to a floor
# below. Nothing that is not on a floor is included with quotes.
#   floors.sh            check
#   floors.sh --update   write floors.txt anew: the floors as they are, the order within a floor
#                        from the includes; files that include each other are an error
# ROOT (.) and LIST (tests/workshop/floors.txt) serve the tests.
set -u
export LC_ALL=C
cd "${ROOT:-.}" || exit 1
list=${LIST:-tests/workshop/floors.txt}
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT

# "floor folder" lines, from the head of the list
sed -n 's/^floor \([0-9]*\) *\(.*\)$/\1 \2/p' "$list" |
    while read -r floor folders; do for f in $folders; do echo "$floor $f"; done; done >"$work/folders"

for f in src/*/*.[ch] models/*.[ch]; do [ -e "$f" ] && echo "$f"; done | sort >"$work/files"

# "file included-file" lines; what is included is found in the root or in src
while read -r f; do
    sed -n 's/^[[:space:]]*#[[:space:]]*include[[:space:]]*"\([^"]*\)".*/\1/p' "$f" |
        while read -r i; do
            if [ -e "$i" ]; then echo "$f $i"; else echo "$f src/$i"; fi
        done
done <"$work/files" >"$work/includes"

# The rooms of one floor in an order that the includes allow. A room is x.c with x.h; where x.c
# includes something that includes x.h, the two stand apart in the list.
order_floor() {
    awk -v floor="$1" 'FILENAME ~ /folders$/ { if ($1 == floor) on[$2] = 1; next }
        function folder(p) { sub(/\/[^\/]*$/, "", p); return p }
        function room(p) { if (p in apart) return p; sub(/\.[ch]$/, "", p); return p }
        FILENAME ~ /apart$/ { apart[$1 ".h"] = apart[$1 ".c"] = 1; print $1 ".h", $1 ".c"; next }
        FILENAME ~ /files$/ { if (folder($1) in on) { r = room($1); print r, r }; next }
        (folder($1) in on) && (folder($2) in on) { a = room($2); b = room($1); if (a != b) print a, b }
    ' "$work/folders" "$work/apart" "$work/files" "$work/includes" | sort -u |
        tsort 2>"$work/loops"
}

update() {
    local floor status=0
    sed '/^[0-9]/d' "$list" >"$work/new"
    for floor in $(cut -d' ' -f1 "$work/folders" | sort -un); do
        : >"$work/apart"
        order_floor "$floor" >"$work/order"
        # rooms in a loop: contract and source apart, then again
        if [ -s "$work/loops" ]; then
            sed -n 's/^tsort: //p' "$work/loops" | while read -r r; do
                [ -e "$r.c" ] && [ -e "$r.h" ] && echo "$r"
            done | sort -u >"$work/apart"
            order_floor "$floor" >"$work/order"
        fi
        if [ -s "$work/loops" ]; then
            echo "floors: on floor $floor these include each other:" >&2
            sed -n 's/^tsort: \([^-]\)/  \1/p' "$work/loops" >&2
            status=1
        fi
        sed "s/^/$floor /" "$work/order" >>"$work/new"
    done
    [ $status -eq 0 ] && cp "$work/new" "$list"
    return $status
}

check() {
    awk -v list="$list" '
        function fault(text) { print "floors: " text; faults++ }
        function folder(p) { sub(/\/[^\/]*$/, "", p); return p }
        FILENAME ~ /folders$/ { floor_of[$2] = $1; next }
        FILENAME ~ /files$/ {
            file[$1] = 1
            room = $1; sub(/\.[ch]$/, "", room)
            base = room; sub(/.*\//, "", base)
            if ((base in home) && home[base] != room)
                fault("the base name " base " is used twice: " home[base] ", " room)
            home[base] = room
            next
        }
        FILENAME ~ /includes$/ { from[++n] = $1; to[n] = $2; next }
        /^[0-9]/ {
            if (NF != 2) fault(list ": not `FLOOR FILE`: " $0)
            if (floor_of[folder($2)] != $1 "") fault($2 " does not belong on floor " $1)
            if ($1 + 0 < last) fault(list ": floor " $1 " stands after floor " last)
            last = $1 + 0
            count++
            found = 0
            if ($2 ~ /\.[ch]$/) { if ($2 in file) { found = 1; put($2) } }
            else {
                if (($2 ".h") in file) { found = 1; put($2 ".h") }
                if (($2 ".c") in file) { found = 1; put($2 ".c") }
            }
            if (!found) fault(list " lists " $2 ", which is not there")
        }
        function put(p) { if (p in place) fault(list " lists " p " twice"); place[p] = count; floor[p] = $1 + 0 }
        END {
            for (p in file) if (!(p in place)) fault(p " is not listed in " list)
            for (k = 1; k <= n; k++) {
                a = from[k]; b = to[k]
                if (!(b in file)) { fault(a " includes " b ", which is on no floor"); continue }
                if (!(a in place) || !(b in place)) continue
                if (floor[b] > floor[a])
                    fault(a " (floor " floor[a] ") includes " b " of floor " floor[b] " above it")
                else if (floor[b] == floor[a] && place[b] > place[a])
                    fault(a " includes " b ", which stands later on the same floor")
            }
            if (faults) exit 1
            print "floors: " count " rooms, " n " includes"
        }' "$work/folders" "$work/files" "$work/includes" "$list" >"$work/said"
    local status=$?
    sort "$work/said"
    return $status
}

case ${1:-} in
--update) update && check ;;
*) check ;;
esac
