/* SPDX-License-Identifier: GPL-3.0-or-later */
/* text.h: a growing string, and the only escaper.
 *
 * Invariant: `s` is NUL-terminated and never NULL after TEXT_INIT + first use of any function;
 * use text_s() to read it. Text is UTF-8. */
#ifndef TERRACE_TEXT_H
#define TERRACE_TEXT_H

#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

struct text {
    char *s;
    size_t length, capacity;
};

#define TEXT_INIT  \
    {              \
        NULL, 0, 0 \
    }

void text_release(struct text *t);
const char *text_s(const struct text *t); /* "" for an empty text */
char *text_take(struct text *t);          /* hands the string over; t is empty again */
void text_clear(struct text *t);          /* keeps the memory */
void text_add(struct text *t, const char *s);
void text_add_n(struct text *t, const char *s, size_t length);
void text_addf(struct text *t, const char *format, ...) __attribute__((format(printf, 2, 3)));
void text_addv(struct text *t, const char *format, va_list arguments)
    __attribute__((format(printf, 2, 0)));
void text_add_html(struct text *t, const char *s); /* & < > " ' escaped: elements, attributes */
void text_add_json(struct text *t,
                   const char *s);                /* with its quotes; escapes as RFC 8785 3.2.2.2 */
void text_add_csv(struct text *t, const char *s); /* quoted only where RFC 4180 needs it */
void text_add_line(struct text *t,
                   const char *s); /* for a terminal: control characters as \u001b */
void text_pad_to(struct text *t, const char *s, int width); /* s, then spaces up to `width` columns;
                                                               negative width: right-aligned */
size_t text_columns(const char *s);                         /* code points of a UTF-8 string */
bool text_is_utf8(const char *s, size_t length);            /* well-formed (RFC 3629) */

/* Bytes of the well-formed UTF-8 sequence at s (1 to 4), its code point in *code (may be NULL);
 * 0 when there is none within `length` bytes. */
size_t text_utf8_step(const char *s, size_t length, uint32_t *code);

/* The member of a NULL-terminated list nearest to `word` (Damerau-Levenshtein distance at most
 * 1/3 of the longer, at least 1), or NULL. */
const char *text_nearest(const char *word, const char *const *list);

#endif
