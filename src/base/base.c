/* SPDX-License-Identifier: GPL-3.0-or-later */
/* base.c: start-up of the libraries we stand on, and the end of a program with a bug. */
#include "base/base.h"

#include <cjson/cJSON.h>
#include <gsl/gsl_errno.h>
#include <stdio.h>
#include <stdlib.h>

#include "base/mem.h"

static void *cjson_new(size_t size)
{
    return mem_grow(NULL, 1, size);
}

void base_init(void)
{
    cJSON_Hooks hooks = {cjson_new, mem_free};

    gsl_set_error_handler_off();
    cJSON_InitHooks(&hooks);
}

void base_bug(const char *file, int line, const char *what)
{
    fprintf(stderr, "terrace: bug at %s:%d: %s\n", file, line, what);
    abort();
}
