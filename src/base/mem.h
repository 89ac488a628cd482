/* SPDX-License-Identifier: GPL-3.0-or-later */
/* mem.h: the one door to malloc.
 *
 * Every function checks count x size for overflow. When memory is refused the program ends here
 * with status 4 and a message on standard error (`_exit`, so that it is safe in a parallel
 * region; files are written under temporary names, so nothing is left half-written). No caller
 * tests for NULL. count x size == 0 returns a valid pointer that may be freed.
 */
#ifndef TERRACE_MEM_H
#define TERRACE_MEM_H

#include <stddef.h>

void *mem_new(size_t count, size_t size);             /* zeroed */
void *mem_grow(void *old, size_t count, size_t size); /* realloc; new bytes unset */
void *mem_aligned(size_t count, size_t size);         /* zeroed, on a 64-byte boundary */
char *mem_text(const char *s);                        /* copy of s; NULL gives NULL */
char *mem_text_n(const char *s, size_t length);       /* copy, NUL added */
void mem_free(void *p);                               /* any of the above; NULL is fine */

/* What every function above does when memory is refused: message, `_exit(4)`. Also for libraries
 * that report lack of memory by themselves. */
_Noreturn void mem_exhausted(void);

/* Test hook: the n-th allocation from now on is refused (0: none). */
void mem_refuse_at(unsigned long n);

#endif
