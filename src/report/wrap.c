/* SPDX-License-Identifier: GPL-3.0-or-later */
/* wrap.c: running text in lines of a page's width. */
#include "report/wrap.h"

#include <string.h>

#include "base/mem.h"

void wrap_add(struct text *out, const char *first, const char *s)
{
    size_t indent = text_columns(first), column = indent;
    text_add(out, first);
    bool fresh = true;
    while (*s) {
        size_t length = strcspn(s, " ");
        char *word = mem_text_n(s, length);
        size_t width = text_columns(word);
        if (!fresh && column + 1 + width > WRAP_WIDTH) {
            text_add(out, "\n");
            text_pad_to(out, "", (int)indent);
            column = indent;
            fresh = true;
        }
        if (!fresh) {
            text_add(out, " ");
            column++;
        }
        text_add(out, word);
        column += width;
        fresh = false;
        mem_free(word);
        s += length;
        s += strspn(s, " ");
    }
    text_add(out, "\n");
}
