/* SPDX-License-Identifier: GPL-3.0-or-later */
/* message_rows.c: the messages of a header as rows, and which malformed input earns each. */
#include "message_rows.h"

#include <CUnit/CUnit.h>

#include "design_files.h"

enum { MESSAGES_MAX = 200, ANY_TEXT = '\1' };

struct message {
    char *name, *pattern; /* ANY_TEXT stands for what a conversion prints */
    size_t literal;       /* characters that are fixed */
    char *hit_by;         /* the malformed design, or NULL */
};

static struct message messages[MESSAGES_MAX];
static size_t message_count;

/* --- the rows, from the headers themselves --- */

/* Behind a conversion specification that starts at s. */
static const char *conversion_end(const char *s)
{
    s += strcspn(s + 1, "sduxcfgX%") + 2;
    return s;
}

/* A string literal's inside as a pattern; escapes resolved. Returns the closing quote. */
static const char *add_literal(const char *s, struct text *pattern)
{
    const char any = ANY_TEXT;

    while (*s != '"' && *s != '\0') {
        if (*s == '%' && s[1] != '%') {
            text_add_n(pattern, &any, 1);
            s = conversion_end(s);
            continue;
        }
        if (*s == '\\' || *s == '%')
            s++;
        text_add_n(pattern, s++, 1);
    }
    return s;
}

static void add_message(const char *name, size_t length, const char *line_end, const char *s)
{
    struct message *m = &messages[message_count];
    struct text pattern = TEXT_INIT;

    for (; s < line_end; s++)
        if (*s == '"')
            s = add_literal(s + 1, &pattern);
    if (pattern.length == 0 || message_count == MESSAGES_MAX)
        return; /* an include guard */
    m->name = mem_text_n(name, length);
    for (const char *p = text_s(&pattern); *p != '\0'; p++)
        m->literal += *p != ANY_TEXT;
    m->pattern = text_take(&pattern);
    message_count++;
}

void message_rows_read(const char *directory, const char *name)
{
    struct text bytes = file_bytes(directory, name, ".h");
    const char *s = text_s(&bytes);

    while ((s = strstr(s, "#define ")) != NULL) {
        const char *end = s;

        s += strlen("#define ");
        do
            end = strchr(end + 1, '\n');
        while (end != NULL && end[-1] == '\\');
        if (end == NULL)
            break;
        add_message(s, strcspn(s, " \n\\"), end, s);
        s = end;
    }
    text_release(&bytes);
}

static bool matches(const char *pattern, const char *s)
{
    for (; *pattern != ANY_TEXT; pattern++, s++) {
        if (*pattern != *s)
            return false;
        if (*s == '\0')
            return true;
    }
    for (;; s++) {
        if (matches(pattern + 1, s))
            return true;
        if (*s == '\0')
            return false;
    }
}

/* The row with the most fixed characters among those that fit. */
static struct message *message_of(const char *text)
{
    struct message *best = NULL;

    for (size_t i = 0; i < message_count; i++)
        if (matches(messages[i].pattern, text) &&
            (best == NULL || messages[i].literal > best->literal))
            best = &messages[i];
    return best;
}

/* The first fault whose line holds `expected`. */
static const struct fault *fault_with(const struct err *e, const char *expected)
{
    for (size_t i = 0; i < e->count; i++) {
        struct err one = {e->status, 1, 1, &e->faults[i]};
        struct text line = TEXT_INIT;
        bool found;

        err_text(&one, &line);
        found = strstr(text_s(&line), expected) != NULL;
        text_release(&line);
        if (found)
            return &e->faults[i];
    }
    return NULL;
}

void message_rows_earn(const struct err *e, const char *expected, const char *by)
{
    const struct fault *fault = fault_with(e, expected);
    struct message *m;

    if (fault == NULL)
        printf("# %s does not say: %s\n", by, expected);
    CU_ASSERT_PTR_NOT_NULL_FATAL(fault);
    m = message_of(fault->message);
    CU_ASSERT_PTR_NOT_NULL_FATAL(m);
    if (m->hit_by != NULL)
        printf("# %s and %s both earn %s\n", by, m->hit_by, m->name);
    CU_ASSERT_PTR_NULL(m->hit_by);
    mem_free(m->hit_by);
    m->hit_by = mem_text(by);
}

size_t message_rows_all_earned(void)
{
    for (size_t i = 0; i < message_count; i++) {
        if (messages[i].hit_by == NULL)
            printf("# nothing earns %s\n", messages[i].name);
        CU_ASSERT_PTR_NOT_NULL(messages[i].hit_by);
    }
    return message_count;
}

void message_rows_forget(void)
{
    for (size_t i = 0; i < message_count; i++) {
        mem_free(messages[i].name);
        mem_free(messages[i].pattern);
        mem_free(messages[i].hit_by);
    }
    message_count = 0;
}
