#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# embed.sh: writes C source that holds text files as NUL-terminated arrays.
#   embed.sh HEADER FILE...   ("a/page.css" becomes `const char page_css[]`, declared in HEADER)
set -eu
header=$1
shift
echo "/* Made by tests/workshop/embed.sh: do not edit. */"
echo "#include \"$header\""
for file; do
    name=$(basename "$file" | tr -c 'A-Za-z0-9\n' _)
    echo "const char ${name}[] = {"
    od -An -v -td1 "$file" | sed 's/-\{0,1\}[0-9]\{1,\}/&,/g'
    echo "0};"
done
