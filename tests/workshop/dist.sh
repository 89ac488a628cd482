#!/bin/bash
# SPDX-License-Identifier: GPL-3.0-or-later
# dist.sh DIRECTORY: terrace-VERSION.tar.gz of the files under version control (outside of a clone: of
# all files but build/), the same bytes every time.
set -eu
cd "$(dirname "$0")/../.."
out=$1
version=$(sed -n 's/^#define TERRACE_VERSION "\(.*\)"/\1/p' src/base/base.h)
name=terrace-$version
mkdir -p "$out"
list=$(mktemp)
trap 'rm -f "$list"' EXIT
if [ -e .git ]; then
    git ls-files -z | sort -z >"$list"
else
    find . -type f ! -path './build/*' -print0 | sed -z 's|^\./||' | sort -z >"$list"
fi
tar --null --files-from="$list" --transform "s|^|$name/|" --owner=0 --group=0 --numeric-owner \
    --mtime='2026-01-01 00:00:00 UTC' --mode='u+rw,go+r,go-w' --format=ustar -cf - |
    gzip -n -9 >"$out/$name.tar.gz.new"
mv "$out/$name.tar.gz.new" "$out/$name.tar.gz"
echo "$out/$name.tar.gz"
