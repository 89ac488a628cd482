/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fuzz.c: what the fuzz targets share. */
#include "fuzz.h"

#include <string.h>

void fuzz_look_at_faults(enum status status, struct err *e)
{
    struct text words = TEXT_INIT;
    size_t lines = 0;
    FUZZ_PROMISE(status == STATUS_OK || status == STATUS_INPUT);
    FUZZ_PROMISE((status == STATUS_OK) == (e->count == 0));
    err_text(e, &words);
    for (const char *p = text_s(&words); (p = strchr(p, '\n')) != NULL; p++)
        lines++;
    FUZZ_PROMISE(lines == e->count);
    FUZZ_PROMISE(text_is_utf8(text_s(&words), words.length));
    text_release(&words);
}
