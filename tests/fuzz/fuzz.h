/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fuzz.h: what the fuzz targets share. A target is one file fuzz_NAME.c with the entry point of
 * libFuzzer; replay.c gives it a main of our own, which reads the committed corpus, for `make
 * test`.
 */
#ifndef TERRACE_FUZZ_H
#define TERRACE_FUZZ_H

#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/base.h"
#include "base/status.h"
#include "base/text.h"

/* A promise of a reader that the input broke: libFuzzer keeps the input. */
#define FUZZ_PROMISE(holds)                                                     \
    do {                                                                        \
        if (!(holds)) {                                                         \
            fprintf(stderr, "%s:%d: broken: %s\n", __FILE__, __LINE__, #holds); \
            abort();                                                            \
        }                                                                       \
    } while (0)

int LLVMFuzzerTestOneInput(const uint8_t *bytes, size_t size);
int LLVMFuzzerInitialize(int *argc, char ***argv);

/* Status and faults of a reader agree, and every fault can be told in one line of text. */
void fuzz_look_at_faults(enum status status, struct err *e);

#endif
