/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sha256.h: SHA-256 (FIPS 180-4) through libcrypto. */
#ifndef TERRACE_SHA256_H
#define TERRACE_SHA256_H

#include <stddef.h>

enum { SHA256_HEX = 65 };

/* Lower-case hexadecimal digest of `length` bytes, NUL-terminated. Returns out. A failure inside
 * libcrypto is treated as lack of memory (ends the program with status 4). */
const char *sha256_hex(char out[SHA256_HEX], const void *bytes, size_t length);

#endif
