/* SPDX-License-Identifier: GPL-3.0-or-later */
/* build.c: what this program was built from, and by what. */
#include "base/build.h"

#define TEXT_OF(x) #x
#define NUMBER_TEXT(x) TEXT_OF(x)
#define DOTTED(a, b, c) NUMBER_TEXT(a) "." NUMBER_TEXT(b) "." NUMBER_TEXT(c)

#if defined(__clang__)
#define COMPILER "clang " DOTTED(__clang_major__, __clang_minor__, __clang_patchlevel__)
#elif defined(__GNUC__)
#define COMPILER "gcc " DOTTED(__GNUC__, __GNUC_MINOR__, __GNUC_PATCHLEVEL__)
#else
#define COMPILER "an unknown compiler"
#endif

#if defined(__x86_64__)
#define FAMILY "x86-64"
#elif defined(__aarch64__)
#define FAMILY "AArch64"
#else
#define FAMILY "an unknown processor family"
#endif

const char *source_sha256(void)
{
    return source_digest;
}

const char *build_words(void)
{
    return COMPILER ", " FAMILY;
}
