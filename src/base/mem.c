/* SPDX-License-Identifier: GPL-3.0-or-later */
/* mem.c: the one door to malloc. */
#include "base/mem.h"

#include <stdatomic.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

enum { ALIGNMENT = 64, STATUS_NO_MEMORY = 4 };

static _Atomic unsigned long refuse_in; /* test hook; atomic because any thread may allocate */

void mem_refuse_at(unsigned long n)
{
    atomic_store(&refuse_in, n);
}

void mem_exhausted(void)
{
    static const char message[] = "terrace: out of memory\n";
    ssize_t written = write(STDERR_FILENO, message, sizeof message - 1);

    (void)written; /* nothing is left to be done about it */
    _exit(STATUS_NO_MEMORY);
}

/* count x size, at least 1 so that an empty array has an address too. */
static size_t bytes_of(size_t count, size_t size)
{
    if (size != 0 && count > (PTRDIFF_MAX - ALIGNMENT) / size)
        mem_exhausted();
    if (atomic_load(&refuse_in) != 0 && atomic_fetch_sub(&refuse_in, 1) == 1)
        mem_exhausted();
    return count * size != 0 ? count * size : 1;
}

void *mem_new(size_t count, size_t size)
{
    void *p = calloc(1, bytes_of(count, size));

    if (p == NULL)
        mem_exhausted();
    return p;
}

void *mem_grow(void *old, size_t count, size_t size)
{
    void *p = realloc(old, bytes_of(count, size));

    if (p == NULL)
        mem_exhausted();
    return p;
}

void *mem_aligned(size_t count, size_t size)
{
    size_t bytes = bytes_of(count, size);
    size_t whole = (bytes + ALIGNMENT - 1) / ALIGNMENT * ALIGNMENT; /* as aligned_alloc demands */
    void *p = aligned_alloc(ALIGNMENT, whole);

    if (p == NULL)
        mem_exhausted();
    memset(p, 0, whole);
    return p;
}

char *mem_text(const char *s)
{
    return s == NULL ? NULL : mem_text_n(s, strlen(s));
}

char *mem_text_n(const char *s, size_t length)
{
    char *copy;

    if (length == SIZE_MAX)
        mem_exhausted();
    copy = mem_grow(NULL, length + 1, 1);
    if (length > 0)
        memcpy(copy, s, length);
    copy[length] = '\0';
    return copy;
}

void mem_free(void *p)
{
    free(p);
}
