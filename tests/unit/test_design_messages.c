/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_design_messages.c: every message a design can earn is earned by one malformed design, with
 * the words and the place that stand beside it, and no two of them earn the same. */
#include <CUnit/CUnit.h>

#include "analysis/vocabulary_rows.h"
#include "design/design.h"
#include "design_files.h"
#include "unit.h"

#define BAD "tests/designs/bad/"

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

static void read_messages(const char *directory, const char *name)
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

/* --- the malformed designs --- */

static void judge(const char *name, struct err *e)
{
    struct text bytes = file_bytes(BAD, name, ".json");
    struct text file = TEXT_INIT;
    struct design *d;

    text_addf(&file, "%s.json", name);
    if (design_parse(&d, text_s(&bytes), bytes.length, text_s(&file), &terrace_vocabulary, e) ==
        STATUS_OK)
        design_check_analysable(d, e);
    design_free(d);
    text_release(&bytes);
    text_release(&file);
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

static void check_design(const char *name)
{
    struct text expected = file_bytes(BAD, name, ".txt");
    struct err e = ERR_INIT;
    const struct fault *fault;
    struct message *m;

    if (expected.length > 0)
        expected.s[--expected.length] = '\0'; /* its line end */
    judge(name, &e);
    CU_ASSERT(expected.length > 0);
    fault = fault_with(&e, text_s(&expected));
    if (fault == NULL)
        printf("# %s does not say: %s\n", name, text_s(&expected));
    CU_ASSERT_PTR_NOT_NULL_FATAL(fault);
    m = message_of(fault->message);
    CU_ASSERT_PTR_NOT_NULL_FATAL(m);
    if (m->hit_by != NULL)
        printf("# %s and %s both earn %s\n", name, m->hit_by, m->name);
    CU_ASSERT_PTR_NULL(m->hit_by);
    mem_free(m->hit_by);
    m->hit_by = mem_text(name);
    err_release(&e);
    text_release(&expected);
}

static void forget_messages(void)
{
    for (size_t i = 0; i < message_count; i++) {
        mem_free(messages[i].name);
        mem_free(messages[i].pattern);
        mem_free(messages[i].hit_by);
    }
    message_count = 0;
}

static void one_design_one_message(void)
{
    struct file_list list = files_in(BAD, ".json");

    read_messages("src/design/", "design_messages");
    read_messages("src/base/", "json_messages");
    CU_ASSERT(message_count > 90);
    CU_ASSERT(list.count >= 40);
    for (size_t i = 0; i < list.count; i++)
        check_design(list.name[i]);
    for (size_t i = 0; i < message_count; i++) {
        if (messages[i].hit_by == NULL)
            printf("# no malformed design earns %s\n", messages[i].name);
        CU_ASSERT_PTR_NOT_NULL(messages[i].hit_by);
    }
    files_release(&list);
    forget_messages();
}

static void all_faults_in_one_run(void)
{
    static const char text[] =
        "{\"terrace\": 2, \"title\": \"\", \"subjects\": 10, \"seed\": -1, \"extra\": 0, \"seed\": "
        "1,\n"
        " \"levels\": {\"list\": [{\"label\": \"a\", \"value\": 1}, {\"label\": \"a\", \"value\": "
        "0}]},\n"
        " \"endpoint\": {\"name\": \"x\", \"type\": \"binary\", \"better\": \"higher\"},\n"
        " \"model\": {\"curve\": \"emax\", \"shift\": 2},\n"
        " \"targets\": {\"t\": {\"rule\": \"optimal\", \"effect\": 0}},\n"
        " \"allocation\": {\"ratio\": [1, 2, 3]}}";
    static const char *const places[] = {"/terrace",
                                         "/seed",
                                         "/title",
                                         "/seed",
                                         "/extra",
                                         "/levels/list/1/value",
                                         "/levels/list/1/label",
                                         "/model/shift",
                                         "/targets/t/effect",
                                         "/targets/t/effect",
                                         "/allocation/ratio"};
    struct err e = ERR_INIT;
    struct design *d;

    CU_ASSERT_EQUAL(design_parse(&d, text, strlen(text), "x", &terrace_vocabulary, &e),
                    STATUS_INPUT);
    CU_ASSERT_PTR_NULL(d);
    CU_ASSERT_EQUAL(e.count, sizeof places / sizeof places[0]);
    for (size_t i = 0; i < sizeof places / sizeof places[0]; i++) {
        size_t wanted = 0, found = 0;

        for (size_t j = 0; j < sizeof places / sizeof places[0]; j++)
            wanted += strcmp(places[j], places[i]) == 0;
        for (size_t j = 0; j < e.count; j++)
            found += strcmp(e.faults[j].pointer, places[i]) == 0;
        CU_ASSERT_EQUAL(found, wanted);
    }
    err_release(&e);
}

static const struct unit_test tests[] = {
    {"each message is earned by one malformed design", one_design_one_message},
    {"all faults of a design in one run, and no more", all_faults_in_one_run },
    UNIT_END
};

int main(void)
{
    return unit_main("design messages", tests);
}
