/* SPDX-License-Identifier: GPL-3.0-or-later */
/* json_write.c: the only way JSON leaves the program. */
#include "base/json_write.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/base.h"
#include "base/mem.h"
#include "base/number.h"

/* Bits of json_writer.state. */
enum { LEVEL_OBJECT = 1, LEVEL_FILLED = 2, LEVEL_INLINE = 4 };

void json_writer_init(struct json_writer *w, struct text *out)
{
    *w = (struct json_writer){.out = out};
}

static void start_line(struct json_writer *w)
{
    text_add(w->out, "\n");
    for (int i = 0; i < w->depth; i++)
        text_add(w->out, "  ");
}

/* Comma and white space before the next member or element of the open container. */
static void separate(struct json_writer *w)
{
    unsigned char *state = &w->state[w->depth];

    if (*state & LEVEL_FILLED)
        text_add(w->out, *state & LEVEL_INLINE ? ", " : ",");
    if (!(*state & LEVEL_INLINE))
        start_line(w);
    *state |= LEVEL_FILLED;
}

/* Before any value: behind its key, or as the next element of a list, or alone in the document. */
static void start_value(struct json_writer *w)
{
    if (w->depth > 0 && (w->state[w->depth] & LEVEL_OBJECT) && !w->after_key)
        BUG("a value without its key");
    if (w->depth > 0 && !w->after_key)
        separate(w);
    w->after_key = false;
}

static void open_level(struct json_writer *w, char bracket, unsigned char inherited)
{
    if (bracket != '{' && bracket != '[')
        BUG("a bracket is { or [");
    if ((size_t)w->depth + 1 >= sizeof w->state)
        BUG("JSON nested too deeply");
    start_value(w);
    inherited |= w->state[w->depth] & LEVEL_INLINE;
    w->depth++;
    w->state[w->depth] = (unsigned char)(inherited | (bracket == '{' ? LEVEL_OBJECT : 0));
    text_add_n(w->out, &bracket, 1);
}

void json_open(struct json_writer *w, char bracket)
{
    open_level(w, bracket, 0);
}

void json_open_inline(struct json_writer *w, char bracket)
{
    open_level(w, bracket, LEVEL_INLINE);
}

void json_close(struct json_writer *w)
{
    unsigned char state = w->state[w->depth];

    if (w->depth == 0 || w->after_key)
        BUG("nothing to close, or a key without its value");
    w->depth--;
    if ((state & LEVEL_FILLED) && !(state & LEVEL_INLINE))
        start_line(w);
    text_add(w->out, state & LEVEL_OBJECT ? "}" : "]");
}

void json_key(struct json_writer *w, const char *key)
{
    if (!(w->state[w->depth] & LEVEL_OBJECT) || w->after_key)
        BUG("a key outside an object, or two in a row");
    separate(w);
    text_add_json(w->out, key);
    text_add(w->out, ": ");
    w->after_key = true;
}

static void write_plain(struct json_writer *w, const char *s)
{
    start_value(w);
    text_add(w->out, s);
}

void json_string(struct json_writer *w, const char *s)
{
    if (s == NULL) {
        json_null(w);
        return;
    }
    start_value(w);
    text_add_json(w->out, s);
}

void json_number(struct json_writer *w, double x)
{
    char spare[NUMBER_CHARS];

    write_plain(w, number_shortest(spare, x));
}

void json_maybe(struct json_writer *w, double x)
{
    if (isnan(x))
        json_null(w);
    else
        json_number(w, x);
}

void json_bool(struct json_writer *w, bool b)
{
    write_plain(w, b ? "true" : "false");
}

void json_null(struct json_writer *w)
{
    write_plain(w, "null");
}

void json_key_string(struct json_writer *w, const char *key, const char *s)
{
    json_key(w, key);
    json_string(w, s);
}

void json_key_number(struct json_writer *w, const char *key, double x)
{
    json_key(w, key);
    json_number(w, x);
}

void json_key_maybe(struct json_writer *w, const char *key, double x)
{
    json_key(w, key);
    json_maybe(w, x);
}

void json_key_bool(struct json_writer *w, const char *key, bool b)
{
    json_key(w, key);
    json_bool(w, b);
}

void json_key_null(struct json_writer *w, const char *key)
{
    json_key(w, key);
    json_null(w);
}

/* --- canonical form (RFC 8785) --- */

/* Byte order of UTF-8 is the order of code points. UTF-16 code units differ from it in one thing:
 * characters of four bytes (first unit D800 to DBFF) come before U+E000 to U+FFFF (first byte EE or
 * EF), so these two first bytes are lifted above all others. */
static int sort_weight(char c)
{
    unsigned char byte = (unsigned char)c;

    return byte == 0xEE || byte == 0xEF ? byte + 0x10 : byte;
}

static int compare_members(const void *a, const void *b)
{
    const char *x = (*(const cJSON *const *)a)->string, *y = (*(const cJSON *const *)b)->string;

    while (*x != '\0' && *x == *y) {
        x++;
        y++;
    }
    return sort_weight(*x) - sort_weight(*y);
}

static void canonical_object(struct text *out, const cJSON *tree)
{
    size_t count = 0, i = 0;
    const cJSON *item, **members;

    cJSON_ArrayForEach(item, tree) count++;
    members = mem_new(count, sizeof *members);
    cJSON_ArrayForEach(item, tree) members[i++] = item;
    qsort(members, count, sizeof *members, compare_members);
    text_add(out, "{");
    for (i = 0; i < count; i++) {
        text_add(out, i > 0 ? "," : "");
        text_add_json(out, members[i]->string);
        text_add(out, ":");
        json_canonical(out, members[i]);
    }
    text_add(out, "}");
    mem_free(members);
}

static void canonical_list(struct text *out, const cJSON *tree)
{
    const cJSON *item;

    text_add(out, "[");
    cJSON_ArrayForEach(item, tree)
    {
        text_add(out, item == tree->child ? "" : ",");
        json_canonical(out, item);
    }
    text_add(out, "]");
}

void json_canonical(struct text *out, const cJSON *tree)
{
    char spare[NUMBER_CHARS];

    if (cJSON_IsObject(tree))
        canonical_object(out, tree);
    else if (cJSON_IsArray(tree))
        canonical_list(out, tree);
    else if (cJSON_IsString(tree))
        text_add_json(out, tree->valuestring);
    else if (cJSON_IsNumber(tree))
        text_add(out, number_shortest(spare, tree->valuedouble));
    else if (cJSON_IsBool(tree))
        text_add(out, cJSON_IsTrue(tree) ? "true" : "false");
    else if (cJSON_IsNull(tree))
        text_add(out, "null");
    else
        BUG("not a JSON value");
}
