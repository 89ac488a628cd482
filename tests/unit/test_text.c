/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_text.c: the growing string, UTF-8 at its borders, escapes of hostile text, nearest words. */
#include "base/text.h"

#include <string.h>

#include "base/base.h"
#include "base/mem.h"
#include "unit.h"

static void growing(void)
{
    struct text t = TEXT_INIT;
    CU_ASSERT_STRING_EQUAL(text_s(&t), "");
    for (int i = 0; i < 1000; i++)
        text_addf(&t, "%03d,", i);
    CU_ASSERT_EQUAL(t.length, 4000);
    CU_ASSERT_EQUAL(strlen(text_s(&t)), 4000);
    CU_ASSERT_EQUAL(memcmp(text_s(&t) + 4 * 517, "517,", 4), 0);
    char *taken = text_take(&t);
    CU_ASSERT_STRING_EQUAL(taken + 3996, "999,");
    CU_ASSERT(t.s == NULL && t.length == 0);
    mem_free(taken);
    text_add_n(&t, "a\0b", 3);
    CU_ASSERT_EQUAL(t.length, 3);
    text_clear(&t);
    CU_ASSERT_STRING_EQUAL(text_s(&t), "");
    text_release(&t);
}

/* RFC 3629, section 4: the borders of each range, and one step beyond */
static void utf8_borders(void)
{
    static const struct {
        const char *s;
        uint32_t code;
    } good[] = {{"\x7f", 0x7F},
                {"\xc2\x80", 0x80},
                {"\xdf\xbf", 0x7FF},
                {"\xe0\xa0\x80", 0x800},
                {"\xed\x9f\xbf", 0xD7FF},
                {"\xee\x80\x80", 0xE000},
                {"\xef\xbf\xbf", 0xFFFF},
                {"\xf0\x90\x80\x80", 0x10000},
                {"\xf4\x8f\xbf\xbf", 0x10FFFF}};
    static const char *const bad[] = {"\x80",
                                      "\xc1\xbf",
                                      "\xe0\x9f\xbf",
                                      "\xed\xa0\x80",
                                      "\xf0\x8f\xbf\xbf",
                                      "\xf4\x90\x80\x80",
                                      "\xf5\x80\x80\x80",
                                      "\xe2\x82",
                                      "\xe2\x82\x41",
                                      "\xff"};
    for (size_t i = 0; i < COUNT_OF(good); i++) {
        uint32_t code = 0;
        CU_ASSERT_EQUAL(text_utf8_step(good[i].s, strlen(good[i].s), &code), strlen(good[i].s));
        CU_ASSERT_EQUAL(code, good[i].code);
        CU_ASSERT_EQUAL(text_columns(good[i].s), 1);
    }
    for (size_t i = 0; i < COUNT_OF(bad); i++) {
        CU_ASSERT_EQUAL(text_utf8_step(bad[i], strlen(bad[i]), NULL), 0);
        CU_ASSERT_FALSE(text_is_utf8(bad[i], strlen(bad[i])));
    }
    CU_ASSERT_EQUAL(text_utf8_step("", 0, NULL), 0);
    CU_ASSERT(text_is_utf8("", 0));
}

static void escaped(void (*add)(struct text *, const char *), const char *s, const char *want)
{
    struct text t = TEXT_INIT;
    add(&t, s);
    CU_ASSERT_STRING_EQUAL(text_s(&t), want);
    CU_ASSERT(text_is_utf8(text_s(&t), t.length));
    text_release(&t);
}

static void hostile_text(void)
{
    escaped(text_add_html, "</script>\xff\"'", "&lt;/script&gt;\xef\xbf\xbd&quot;&#39;");
    escaped(text_add_json, "\b\f\r\t\x1f\x7f/", "\"\\b\\f\\r\\t\\u001f\x7f/\"");
    escaped(text_add_json, "a\xc0z", "\"a\xef\xbf\xbdz\"");
    escaped(text_add_line, "\x1b[2J\xc2\x9b\n\x7f\xe2\x80\xa8\xc3\xa9",
            "\\u001b[2J\\u009b\\u000a\\u007f\\u2028\xc3\xa9");
    escaped(text_add_csv, "plain; text", "plain; text");
    escaped(text_add_csv, "\"", "\"\"\"\"");
    escaped(text_add_csv, "a\nb", "\"a\nb\"");
    escaped(text_add_csv, "a\rb", "\"a\rb\"");
    escaped(text_add_csv, "", "");
}

static void padding_counts_characters(void)
{
    struct text t = TEXT_INIT;
    text_pad_to(&t, "\xc3\xa9t\xc3\xa9", 5);
    text_pad_to(&t, "ab", -4);
    text_pad_to(&t, "too long", 3);
    CU_ASSERT_STRING_EQUAL(text_s(&t), "\xc3\xa9t\xc3\xa9    abtoo long");
    text_release(&t);
}

static void nearest_is(const char *word, const char *const *list, const char *want)
{
    const char *got = text_nearest(word, list);
    CU_ASSERT(got != NULL && strcmp(got, want) == 0);
}

static void nearest(void)
{
    static const char *const list[] = {"emax", "linear", "log_linear", "sd", NULL};
    static const char *const none[] = {NULL};
    nearest_is("emxa", list, "emax");     /* one exchange */
    nearest_is("lineer", list, "linear"); /* one substitution */
    nearest_is("loglinear", list, "log_linear");
    nearest_is("s", list, "sd");                     /* 1 is allowed for short words */
    CU_ASSERT_PTR_NULL(text_nearest("eamx2", list)); /* two changes in five letters */
    CU_ASSERT_PTR_NULL(text_nearest("", list));
    CU_ASSERT_PTR_NULL(text_nearest("emax", none));
}

static const struct unit_test tests[] = {
    {"a growing string", growing},
    {"UTF-8 at the borders of its ranges", utf8_borders},
    {"escapes of hostile text", hostile_text},
    {"padding counts characters", padding_counts_characters},
    {"nearest words", nearest},
    UNIT_END,
};

int main(void)
{
    return unit_main("text", tests);
}
