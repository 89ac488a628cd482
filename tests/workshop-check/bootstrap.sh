#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# bootstrap.sh: which packages `make` looks for, and what it does when some are missing; with
# dpkg-query, apt-get, id and sudo replaced, so that nothing is installed.
set -u
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
mkdir "$work/bin" "$work/nosudo"
faults=0

fake() {
    printf '#!/bin/sh\n%s\n' "$2" >"$work/bin/$1"
    chmod +x "$work/bin/$1"
}
# MISSING: packages that are not installed
fake dpkg-query 'status=0
for p; do
    case $p in -*) continue ;; *"{"*) continue ;; esac
    case " $MISSING " in
    *" $p "*) echo "dpkg-query: no packages found matching $p" >&2; status=1 ;;
    *) echo "$p installed" ;;
    esac
done
case " $MISSING " in *" removed "*) echo "libgsl-dev config-files" ;; esac
exit $status'
fake apt-get 'echo "apt-get $* ${DEBIAN_FRONTEND:-}" >>"$LOG"; exit "${APT_STATUS:-0}"'
fake id 'echo "$FAKE_UID"'
fake sudo '[ "$1" = -n ] || exit 9
[ "$SUDO_WORKS" = 1 ] || exit 1
shift
echo "sudo $*" >>"$LOG"
exec "$@"'

# bring_up MISSING UID SUDO_WORKS [APT_STATUS]
bring_up() {
    : >"$work/log"
    MISSING=$1 FAKE_UID=$2 SUDO_WORKS=$3 APT_STATUS=${4:-0} LOG=$work/log \
        PATH=$work/bin:$PATH sh tests/workshop/bootstrap.sh "make demo" \
        gcc libgsl-dev libcsv-dev >"$work/said" 2>&1
    status=$?
}
check() {
    if eval "$2"; then
        echo "ok - bootstrap: $1"
    else
        echo "not ok - bootstrap: $1"
        echo "    not so: $2 (status $status); apt-get was called so:"
        sed 's/^/    | /' "$work/log"
        echo "    and this was printed:"
        sed 's/^/    | /' "$work/said"
        faults=1
    fi
}

install="apt-get install -y --no-install-recommends"
bring_up "" 0 0
check "nothing missing: apt-get is not called" '[ $status -eq 0 ] && [ ! -s "$work/log" ]'

bring_up "libgsl-dev libcsv-dev" 0 0
printf '%s\n' "apt-get update noninteractive" \
    "$install libgsl-dev libcsv-dev noninteractive" >"$work/want"
check "missing, as root: update, then install by name" \
    '[ $status -eq 0 ] && cmp -s "$work/want" "$work/log"'

bring_up "libcsv-dev" 1000 1
check "missing, not root: by sudo -n" \
    '[ $status -eq 0 ] && grep -q "^sudo .*apt-get update" "$work/log" &&
     grep -q "^sudo .*$install libcsv-dev" "$work/log"'

bring_up "libcsv-dev" 1000 0
check "missing, neither root nor sudo: the one command, and failure" \
    '[ $status -ne 0 ] && [ ! -s "$work/log" ] && [ "$(grep -c "apt-get" "$work/said")" = 1 ] &&
     grep -q "apt-get update && $install libcsv-dev" "$work/said" &&
     grep -q "make demo" "$work/said"'

bring_up "libcsv-dev" 0 0 100
check "apt-get fails: failure, in words" \
    '[ $status -ne 0 ] && grep -q "could not install: libcsv-dev" "$work/said"'

bring_up "libgsl-dev removed" 0 0
check "a package of which only the settings are left is missing" \
    'grep -q "install .* libgsl-dev" "$work/log"'

# Not a Debian system: a PATH with the shell's own tools only.
for tool in sh cat; do ln -s "$(command -v $tool)" "$work/nosudo/$tool"; done
: >"$work/log"
PATH=$work/nosudo sh tests/workshop/bootstrap.sh "make" gcc libcsv-dev >"$work/said" 2>&1
status=$?
check "no dpkg-query: a notice, and on it goes" \
    '[ $status -eq 0 ] && grep -q "not checking for the packages: gcc libcsv-dev" "$work/said"'

# The Makefile asks for the right names and stops where they cannot be had.
plan() {
    : >"$work/log"
    MISSING="$1" FAKE_UID=1000 SUDO_WORKS=0 LOG=$work/log PATH=$work/bin:$PATH \
        make BUILD="$work/build" "${@:2}" >"$work/said" 2>&1
    status=$?
}
names="gcc libc6-dev pkg-config libgsl-dev libnlopt-dev libcjson-dev libcunit1-dev libcsv-dev libssl-dev"
for goal in all demo test; do
    plan "$names" $goal
    sorted=$(echo "$names" | tr ' ' '\n' | LC_ALL=C sort | tr '\n' ' ')
    check "make $goal asks for every library by name before it builds" \
        '[ $status -ne 0 ] && [ ! -e "$work/build" ] &&
         grep -q "no-install-recommends ${sorted% }" "$work/said"'
done
plan "clang libomp-dev" all CC=clang
check "CC=clang asks for clang and its OpenMP" \
    '[ $status -ne 0 ] && grep -q "no-install-recommends clang libomp-dev" "$work/said"'
plan "$names" clean
check "make clean asks for nothing" '[ $status -eq 0 ]'
exit $faults
