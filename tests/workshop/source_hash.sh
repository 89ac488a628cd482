#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# source_hash.sh: one SHA-256 over everything the program is made from: the lines of sha256sum for
# every source under src/ and models/ and for the Makefile, sorted by name, hashed again.
#   source_hash.sh       prints the digest
#   source_hash.sh --c   writes C source that holds it (see src/base/build.h)
set -eu
export LC_ALL=C
digest=$({ find src models -name '*.[ch]' -o -name '*.css' -o -name '*.js'; echo Makefile; } |
    sort | xargs sha256sum | sha256sum | cut -d' ' -f1)
case ${1:-} in
--c)
    echo "/* Made by tests/workshop/source_hash.sh: do not edit. */"
    echo '#include "base/build.h"'
    echo "const char source_digest[SHA256_HEX] = \"$digest\";"
    ;;
*) echo "$digest" ;;
esac
