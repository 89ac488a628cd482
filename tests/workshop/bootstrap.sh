#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# bootstrap.sh: makes sure that Debian packages are there.
#   bootstrap.sh "the command to repeat" PACKAGE...
# Nothing missing: apt-get is not called. Else it installs them as root or by `sudo -n`; where
# neither is allowed, it prints the one command to type and fails.
set -u
again=$1
shift
[ $# -gt 0 ] || exit 0

if ! command -v dpkg-query >/dev/null 2>&1; then
    echo "Not a Debian system: not checking for the packages: $*" >&2
    exit 0
fi

installed=$(dpkg-query -W -f '${Package} ${db:Status-Status}\n' "$@" 2>/dev/null)
missing=
for package; do
    case "
$installed
" in
    *"
$package installed
"*) ;;
    *) missing="$missing $package" ;;
    esac
done
[ -n "$missing" ] || exit 0

if [ "$(id -u)" = 0 ]; then
    as_root=
elif command -v sudo >/dev/null 2>&1 && sudo -n true 2>/dev/null; then
    as_root="sudo -n"
else
    echo "Packages are missing:$missing" >&2
    echo "Type this, then '$again' again:" >&2
    echo "  sudo sh -c 'apt-get update && apt-get install -y --no-install-recommends$missing'" >&2
    exit 1
fi
echo "Installing the missing packages:$missing" >&2
# shellcheck disable=SC2086 # both are lists of words
if ! { $as_root env DEBIAN_FRONTEND=noninteractive apt-get update &&
    $as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y --no-install-recommends $missing; }; then
    echo "apt-get could not install:$missing" >&2
    exit 1
fi
