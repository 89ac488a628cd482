/* SPDX-License-Identifier: GPL-3.0-or-later */
/* markup_check.c: a small checker of well-formed markup for tests. */
#include "markup_check.h"

#include <ctype.h>
#include <stdio.h>
#include <string.h>

enum { DEPTH_MAX = 64, NAME_MAX_CHARS = 32, IDS_MAX = 512 };

struct checker {
    const char *page, *at;
    char open[DEPTH_MAX][NAME_MAX_CHARS];
    size_t depth;
    const char *id[IDS_MAX];
    size_t id_length[IDS_MAX], ids;
};

static bool fault(const struct checker *c, const char *what)
{
    printf("# markup: %s at byte %ld: %.60s\n", what, (long)(c->at - c->page), c->at);
    return false;
}

static bool starts(const char *s, const char *word)
{
    return strncmp(s, word, strlen(word)) == 0;
}

static bool is_void(const char *name)
{
    return strcmp(name, "meta") == 0 || strcmp(name, "br") == 0;
}

static bool entity(struct checker *c)
{
    static const char *const known[] = {"&amp;", "&lt;", "&gt;", "&quot;", "&#39;", NULL};
    for (size_t i = 0; known[i]; i++)
        if (starts(c->at, known[i])) {
            c->at += strlen(known[i]);
            return true;
        }
    return fault(c, "an & that begins no entity");
}

static bool id_is_new(struct checker *c, const char *value, size_t length)
{
    for (size_t i = 0; i < c->ids; i++)
        if (c->id_length[i] == length && strncmp(c->id[i], value, length) == 0)
            return fault(c, "an id stands twice");
    if (c->ids == IDS_MAX)
        return fault(c, "more ids than the checker holds");
    c->id[c->ids] = value;
    c->id_length[c->ids++] = length;
    return true;
}

/* name="value" with blanks before it. */
static bool attribute(struct checker *c)
{
    const char *name = c->at;
    while (isalnum((unsigned char)*c->at) || *c->at == '-')
        c->at++;
    const size_t length = (size_t)(c->at - name);
    if (length == 0 || !starts(c->at, "=\""))
        return fault(c, "an attribute that is not name=\"value\"");
    c->at += 2;
    const char *value = c->at;
    while (*c->at && *c->at != '"') {
        if (*c->at == '<' || (*c->at == '&' && !entity(c)))
            return fault(c, "a raw < or & in an attribute");
        c->at += *c->at != '"';
    }
    if (!*c->at)
        return fault(c, "an attribute without an end");
    if (length == 2 && strncmp(name, "id", 2) == 0 && !id_is_new(c, value, (size_t)(c->at - value)))
        return false;
    c->at++;
    return true;
}

static bool tag_name(struct checker *c, char name[NAME_MAX_CHARS])
{
    size_t n = 0;
    while (isalnum((unsigned char)*c->at) && n + 1 < NAME_MAX_CHARS)
        name[n++] = *c->at++;
    name[n] = '\0';
    return n > 0 || fault(c, "a < that begins no tag");
}

static bool close_tag(struct checker *c)
{
    char name[NAME_MAX_CHARS];
    c->at += 2;
    if (!tag_name(c, name))
        return false;
    if (*c->at != '>' || c->depth == 0 || strcmp(c->open[c->depth - 1], name) != 0)
        return fault(c, "an end tag that closes nothing");
    c->depth--;
    c->at++;
    return true;
}

static bool push(struct checker *c, const char *name)
{
    if (c->depth == DEPTH_MAX)
        return fault(c, "tags too deep");
    snprintf(c->open[c->depth], NAME_MAX_CHARS, "%s", name);
    c->depth++;
    if (strcmp(name, "style") != 0)
        return true;
    const char *end = strstr(c->at, "</style>");
    if (!end)
        return fault(c, "a style without an end");
    c->at = end;
    return true;
}

static bool open_tag(struct checker *c)
{
    char name[NAME_MAX_CHARS];
    c->at++;
    if (!tag_name(c, name))
        return false;
    while (*c->at == ' ') {
        c->at++;
        if (!attribute(c))
            return false;
    }
    const bool empty = starts(c->at, "/>");
    c->at += empty;
    if (*c->at != '>')
        return fault(c, "a tag without an end");
    c->at++;
    return empty || is_void(name) || push(c, name);
}

bool markup_is_sound(const char *page)
{
    struct checker c = {.page = page, .at = page};
    if (starts(c.at, "<!DOCTYPE html>"))
        c.at += strlen("<!DOCTYPE html>");
    while (*c.at) {
        bool fine = true;
        if (starts(c.at, "</"))
            fine = close_tag(&c);
        else if (*c.at == '<')
            fine = open_tag(&c);
        else if (*c.at == '&')
            fine = entity(&c);
        else if (*c.at == '>')
            fine = fault(&c, "a raw >");
        else
            c.at++;
        if (!fine)
            return false;
    }
    return c.depth == 0 || fault(&c, "a tag is never closed");
}

size_t markup_count(const char *text, const char *word)
{
    size_t n = 0;
    for (const char *s = strstr(text, word); s; s = strstr(s + strlen(word), word))
        n++;
    return n;
}
