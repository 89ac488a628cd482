# SPDX-License-Identifier: GPL-3.0-or-later
# lib.sh: what the tests of the command line share. Sourced; works in a directory of its own.
#   run ARGUMENT...      runs the program: $status, and the files `out` and `err`
#   try NAME FUNCTION    one test: the function's status decides; what it prints explains a failure
set -u
export LC_ALL=C.UTF-8
unset NO_COLOR
root=$(cd "$(dirname "${BASH_SOURCE[0]}")/../.." && pwd)
files=$root/tests/cli/files
TERRACE=${TERRACE:-$root/build/terrace}
case $TERRACE in /*) ;; *) TERRACE=$root/$TERRACE ;; esac
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
cd "$work" || exit 1
failed=0

run() {
    "$TERRACE" "$@" >"$work/out" 2>"$work/err" </dev/null
    status=$?
}

try() {
    if ( "$2" ) >"$work/told" 2>&1; then
        echo "ok - $room: $1"
    else
        echo "not ok - $room: $1"
        sed 's/^/    /' "$work/told"
        failed=1
    fi
}

# Small claims; each says what it saw when it fails.
ended() {
    [ "$status" = "$1" ] && return 0
    echo "status $status instead of $1; standard error:"
    cat "$work/err"
    return 1
}
out_has() { grep -qF -- "$1" "$work/out" || { echo "standard output lacks: $1"; return 1; }; }
err_has() { grep -qF -- "$1" "$work/err" || { echo "standard error lacks: $1; it is:"; cat "$work/err"; return 1; }; }
out_empty() { [ ! -s "$work/out" ] || { echo "standard output is not empty"; return 1; }; }
err_empty() { [ ! -s "$work/err" ] || { echo "standard error:"; cat "$work/err"; return 1; }; }
err_lines() {
    [ "$(wc -l <"$work/err")" = "$1" ] && return 0
    echo "not $1 lines on standard error:"
    cat "$work/err"
    return 1
}
absent() { [ ! -e "$1" ] || { echo "$1 exists:"; ls -la "$1"; return 1; }; }
