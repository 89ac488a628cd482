/* SPDX-License-Identifier: GPL-3.0-or-later */
/* build.h: what this program was built from, and by what. For evidence, never for results. */
#ifndef TERRACE_BUILD_H
#define TERRACE_BUILD_H

#include "base/sha256.h"

/* SHA-256, lower-case hexadecimal, over all sources (src, models, the Makefile): of the text that
 * `sha256sum` prints for them, sorted by name. The same in every build of the same sources, from
 * a clone or from a tarball. `sh tests/workshop/source_hash.sh` prints it too. */
const char *source_sha256(void);

/* Compiler, its version and the processor family compiled for, e.g. "gcc 12.2.0, x86-64". */
const char *build_words(void);

extern const char source_digest[SHA256_HEX]; /* generated; read it through source_sha256 */

#endif
