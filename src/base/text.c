/* SPDX-License-Identifier: GPL-3.0-or-later */
/* text.c: a growing string, and the only escaper. */
#include "base/text.h"

#include <stdio.h>
#include <string.h>

#include "base/base.h"
#include "base/mem.h"

static void make_room(struct text *t, size_t more)
{
    size_t need = t->length + more + 1;

    if (need < more)
        mem_exhausted();
    if (need <= t->capacity)
        return;
    if (need < 2 * t->capacity)
        need = 2 * t->capacity;
    if (need < 64)
        need = 64;
    t->s = mem_grow(t->s, need, 1);
    t->capacity = need;
}

void text_release(struct text *t)
{
    mem_free(t->s);
    *t = (struct text)TEXT_INIT;
}

const char *text_s(const struct text *t)
{
    return t->s == NULL ? "" : t->s;
}

char *text_take(struct text *t)
{
    char *s = t->s == NULL ? mem_text("") : t->s;

    *t = (struct text)TEXT_INIT;
    return s;
}

void text_clear(struct text *t)
{
    t->length = 0;
    if (t->s != NULL)
        t->s[0] = '\0';
}

void text_add_n(struct text *t, const char *s, size_t length)
{
    make_room(t, length);
    if (length > 0)
        memcpy(t->s + t->length, s, length);
    t->length += length;
    t->s[t->length] = '\0';
}

void text_add(struct text *t, const char *s)
{
    text_add_n(t, s, strlen(s));
}

void text_addv(struct text *t, const char *format, va_list arguments)
{
    va_list again;
    int length;

    va_copy(again, arguments);
    length = vsnprintf(NULL, 0, format, again);
    va_end(again);
    if (length < 0)
        BUG("a format that vsnprintf refuses");
    make_room(t, (size_t)length);
    vsnprintf(t->s + t->length, (size_t)length + 1, format, arguments);
    t->length += (size_t)length;
}

void text_addf(struct text *t, const char *format, ...)
{
    va_list arguments;

    va_start(arguments, format);
    text_addv(t, format, arguments);
    va_end(arguments);
}

/* --- UTF-8 (RFC 3629, section 4) --- */

/* Overlong forms, surrogates and values above U+10FFFF show in the second byte: its range. */
static bool second_byte_fits(unsigned char first, unsigned char second)
{
    unsigned char low = 0x80, high = 0xBF;

    if (first == 0xE0)
        low = 0xA0;
    else if (first == 0xED)
        high = 0x9F;
    else if (first == 0xF0)
        low = 0x90;
    else if (first == 0xF4)
        high = 0x8F;
    return second >= low && second <= high;
}

static size_t sequence_bytes(unsigned char first)
{
    if (first < 0x80)
        return 1;
    if (first >= 0xC2 && first <= 0xDF)
        return 2;
    if (first >= 0xE0 && first <= 0xEF)
        return 3;
    if (first >= 0xF0 && first <= 0xF4)
        return 4;
    return 0;
}

size_t text_utf8_step(const char *s, size_t length, uint32_t *code)
{
    unsigned char first = length > 0 ? (unsigned char)s[0] : 0;
    size_t bytes = sequence_bytes(first);
    uint32_t value;

    if (bytes == 0 || bytes > length)
        return 0;
    if (bytes > 1 && !second_byte_fits(first, (unsigned char)s[1]))
        return 0;
    value = bytes == 1 ? first : first & (0x7Fu >> bytes);
    for (size_t i = 1; i < bytes; i++) {
        unsigned char byte = (unsigned char)s[i];

        if ((byte & 0xC0) != 0x80)
            return 0;
        value = value << 6 | (byte & 0x3Fu);
    }
    if (code != NULL)
        *code = value;
    return bytes;
}

bool text_is_utf8(const char *s, size_t length)
{
    size_t i = 0;

    while (i < length) {
        size_t step = text_utf8_step(s + i, length - i, NULL);

        if (step == 0)
            return false;
        i += step;
    }
    return true;
}

size_t text_columns(const char *s)
{
    size_t columns = 0;

    for (; *s != '\0'; s++)
        if (((unsigned char)*s & 0xC0) != 0x80)
            columns++;
    return columns;
}

/* --- escapes --- */

/* Adds s with `replace` asked for each code point: a replacement, or NULL to keep the character.
 * Bytes that are not UTF-8 become U+FFFD, so that no output file is ever ill-formed. */
static void add_replaced(struct text *t, const char *s,
                         const char *(*replace)(uint32_t code, char spare[8]))
{
    size_t length = strlen(s), i = 0;

    while (i < length) {
        char spare[8];
        uint32_t code = 0;
        size_t step = text_utf8_step(s + i, length - i, &code);
        const char *instead = step == 0 ? "\xEF\xBF\xBD" : replace(code, spare);

        if (instead != NULL)
            text_add(t, instead);
        else
            text_add_n(t, s + i, step);
        i += step == 0 ? 1 : step;
    }
}

static const char *html_replacement(uint32_t code, char spare[8])
{
    (void)spare;
    switch (code) {
    case '&':
        return "&amp;";
    case '<':
        return "&lt;";
    case '>':
        return "&gt;";
    case '"':
        return "&quot;";
    case '\'':
        return "&#39;";
    default:
        return NULL;
    }
}

void text_add_html(struct text *t, const char *s)
{
    add_replaced(t, s, html_replacement);
}

static const char *json_replacement(uint32_t code, char spare[8])
{
    switch (code) {
    case '"':
        return "\\\"";
    case '\\':
        return "\\\\";
    case '\b':
        return "\\b";
    case '\t':
        return "\\t";
    case '\n':
        return "\\n";
    case '\f':
        return "\\f";
    case '\r':
        return "\\r";
    default:
        if (code >= 0x20)
            return NULL;
        snprintf(spare, 8, "\\u%04x", (unsigned)(code & 0x1F));
        return spare;
    }
}

void text_add_json(struct text *t, const char *s)
{
    text_add(t, "\"");
    add_replaced(t, s, json_replacement);
    text_add(t, "\"");
}

/* The C1 set (U+0080 to U+009F) can steer a terminal as well as the C0 set; U+2028 and U+2029
 * break lines. */
static const char *line_replacement(uint32_t code, char spare[8])
{
    bool control = code < 0x20 || (code >= 0x7F && code < 0xA0);

    if (!control && code != 0x2028 && code != 0x2029)
        return NULL;
    snprintf(spare, 8, "\\u%04x", (unsigned)(code & 0xFFFF));
    return spare;
}

void text_add_line(struct text *t, const char *s)
{
    add_replaced(t, s, line_replacement);
}

void text_add_csv(struct text *t, const char *s)
{
    if (strpbrk(s, ",\"\r\n") == NULL) {
        text_add(t, s);
        return;
    }
    text_add(t, "\"");
    for (; *s != '\0'; s++)
        text_add_n(t, *s == '"' ? "\"\"" : s, *s == '"' ? 2 : 1);
    text_add(t, "\"");
}

void text_pad_to(struct text *t, const char *s, int width)
{
    size_t columns = text_columns(s), wanted = (size_t)(width < 0 ? -width : width);
    size_t blanks = wanted > columns ? wanted - columns : 0;

    if (width >= 0)
        text_add(t, s);
    while (blanks-- > 0)
        text_add(t, " ");
    if (width < 0)
        text_add(t, s);
}

/* --- the nearest word --- */

static size_t least(size_t a, size_t b)
{
    return a < b ? a : b;
}

/* Damerau-Levenshtein distance (optimal string alignment): insertions, deletions, substitutions and
 * exchanges of two neighbours count one each. row: 3 x (strlen(b) + 1) numbers of workspace. */
static size_t distance(const char *a, const char *b, size_t *row)
{
    size_t na = strlen(a), nb = strlen(b);
    size_t *before = row, *last = row + (nb + 1), *now = row + 2 * (nb + 1);

    for (size_t j = 0; j <= nb; j++)
        last[j] = j;
    for (size_t i = 1; i <= na; i++) {
        size_t *spare = before;

        now[0] = i;
        for (size_t j = 1; j <= nb; j++) {
            now[j] = least(least(last[j], now[j - 1]) + 1, last[j - 1] + (a[i - 1] != b[j - 1]));
            if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1])
                now[j] = least(now[j], before[j - 2] + 1);
        }
        before = last;
        last = now;
        now = spare;
    }
    return last[nb];
}

const char *text_nearest(const char *word, const char *const *list)
{
    const char *best = NULL;
    size_t smallest = (size_t)-1, nw = strlen(word);

    for (; *list != NULL; list++) {
        size_t n = strlen(*list), longer = n > nw ? n : nw;
        size_t allowed = longer / 3 > 1 ? longer / 3 : 1;
        size_t *row, d;

        if ((n > nw ? n - nw : nw - n) > allowed)
            continue; /* the difference in length is a lower bound of the distance */
        row = mem_new(3 * (n + 1), sizeof *row);
        d = distance(word, *list, row);
        mem_free(row);
        if (d <= allowed && d < smallest) {
            smallest = d;
            best = *list;
        }
    }
    return best;
}
