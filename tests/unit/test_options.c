/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_options.c: the command line: grammar, ranges, suggestions, help. */
#include <string.h>

#include "base/base.h"
#include "base/text.h"
#include "command/options.h"
#include "unit.h"

static const struct option own[] = {
    {"cut", 0, OPTION_TEXT, false, "TIME", 0, 0, "data cut"},
    {"close", 0, OPTION_TEXT, true, "LABEL", 0, 0, "a closed level"},
    {"analysis", 0, OPTION_WHOLE, false, "K", 1, 100, "which analysis"},
    {"final", 0, OPTION_FLAG, false, NULL, 0, 0, "the last"},
    {NULL, 0, OPTION_FLAG, false, NULL, 0, 0, NULL}};

struct reading {
    struct options o;
    struct err e;
    enum status status;
};

#define READ(r, ...)                                        \
    const char *const words_[] = {__VA_ARGS__};             \
    struct reading r = {OPTIONS_INIT, ERR_INIT, STATUS_OK}; \
    r.status = options_parse(&r.o, "analyze", own, COUNT_OF(words_), words_, &r.e)

static void done(struct reading *r)
{
    options_release(&r->o);
    err_release(&r->e);
}

/* The faults as printed hold this text. */
static bool says(const struct reading *r, const char *what)
{
    struct text s = TEXT_INIT;
    err_text(&r->e, &s);
    bool found = strstr(text_s(&s), what) != NULL;
    text_release(&s);
    return found;
}

static void anywhere_and_both_forms(void)
{
    READ(r, "--seed", "7", "d.json", "--final", "data.csv", "--cut=2026-01-05", "-o", "out");
    CU_ASSERT_EQUAL(r.status, STATUS_OK);
    CU_ASSERT_EQUAL_FATAL(r.o.arguments, 2);
    CU_ASSERT_STRING_EQUAL(r.o.argument[0], "d.json");
    CU_ASSERT_STRING_EQUAL(r.o.argument[1], "data.csv");
    CU_ASSERT_EQUAL(options_number(&r.o, "seed", 0), 7);
    CU_ASSERT_TRUE(options_has(&r.o, "final"));
    CU_ASSERT_FALSE(options_has(&r.o, "force"));
    CU_ASSERT_STRING_EQUAL(options_text(&r.o, "cut"), "2026-01-05");
    CU_ASSERT_STRING_EQUAL(options_text(&r.o, "out"), "out");
    CU_ASSERT_EQUAL(options_number(&r.o, "threads", -1), -1);
    done(&r);
}

static void two_dashes_end_options(void)
{
    READ(r, "--final", "--", "--cut", "-o");
    CU_ASSERT_EQUAL(r.status, STATUS_OK);
    CU_ASSERT_EQUAL_FATAL(r.o.arguments, 2);
    CU_ASSERT_STRING_EQUAL(r.o.argument[0], "--cut");
    CU_ASSERT_STRING_EQUAL(r.o.argument[1], "-o");
    done(&r);
}

static void repeated_only_where_marked(void)
{
    READ(r, "--close", "A", "--close=B", "--cut", "1", "--cut", "2");
    CU_ASSERT_EQUAL(r.status, STATUS_INPUT);
    CU_ASSERT_EQUAL(r.e.count, 1);
    CU_ASSERT_TRUE(says(&r, "--cut is given more than once"));
    CU_ASSERT_STRING_EQUAL(options_each(&r.o, "close", 0), "A");
    CU_ASSERT_STRING_EQUAL(options_each(&r.o, "close", 1), "B");
    CU_ASSERT_PTR_NULL(options_each(&r.o, "close", 2));
    done(&r);
}

static void unknown_gets_nearest(void)
{
    READ(r, "--sede", "5", "--quiett", "--zzzzzzzz=1", "-x");
    CU_ASSERT_EQUAL(r.status, STATUS_INPUT);
    CU_ASSERT_FALSE(r.o.usable);
    CU_ASSERT_EQUAL(r.e.count, 4);
    CU_ASSERT_TRUE(says(&r, "unknown option --sede of 'analyze'; did you mean --seed?"));
    CU_ASSERT_TRUE(says(&r, "did you mean --quiet?"));
    CU_ASSERT_TRUE(says(&r, "unknown option --zzzzzzzz of 'analyze'; 'terrace analyze --help'"));
    CU_ASSERT_TRUE(says(&r, "unknown option -x of"));
    done(&r);
}

static void no_abbreviations(void)
{
    READ(r, "--fin", "--prog");
    CU_ASSERT_EQUAL(r.status, STATUS_INPUT);
    CU_ASSERT_EQUAL(r.e.count, 2);
    CU_ASSERT_FALSE(options_has(&r.o, "final"));
    CU_ASSERT_FALSE(options_has(&r.o, "progress"));
    done(&r);
}

static void values_wanted_and_unwanted(void)
{
    READ(r, "--cut", "--final", "--force=yes", "--seed=", "--out");
    CU_ASSERT_EQUAL(r.status, STATUS_INPUT);
    CU_ASSERT_EQUAL(r.e.count, 4);
    CU_ASSERT_TRUE(says(&r, "--cut needs a value: --cut TIME"));
    CU_ASSERT_TRUE(says(&r, "--force takes no value"));
    CU_ASSERT_TRUE(says(&r, "--seed needs a value: --seed N"));
    CU_ASSERT_TRUE(says(&r, "--out needs a value: --out DIR"));
    CU_ASSERT_TRUE(options_has(&r.o, "final"));
    done(&r);
}

static void whole_numbers_in_range(void)
{
    READ(r, "--seed", "9007199254740991", "--analysis", "101", "--threads", "1.5");
    CU_ASSERT_EQUAL(r.status, STATUS_INPUT);
    CU_ASSERT_EQUAL(r.e.count, 2);
    CU_ASSERT_TRUE(r.o.usable);
    CU_ASSERT_EQUAL(options_number(&r.o, "seed", 0), 9007199254740991.0);
    CU_ASSERT_TRUE(says(&r, "--analysis: '101' is not a whole number from 1 to 100"));
    CU_ASSERT_TRUE(says(&r, "--threads: '1.5' is not a whole number from 1 to 1024"));
    done(&r);
}

static void seed_beyond_53_bits(void)
{
    READ(r, "--seed", "9007199254740992");
    CU_ASSERT_EQUAL(r.status, STATUS_INPUT);
    CU_ASSERT_TRUE(says(&r, "from 0 to 9007199254740991"));
    done(&r);
}

static void negative_values_and_lone_dash(void)
{
    READ(r, "--cut", "-3", "-");
    CU_ASSERT_EQUAL(r.status, STATUS_OK);
    CU_ASSERT_STRING_EQUAL(options_text(&r.o, "cut"), "-3");
    CU_ASSERT_EQUAL_FATAL(r.o.arguments, 1);
    CU_ASSERT_STRING_EQUAL(r.o.argument[0], "-");
    done(&r);
}

static void values_are_utf8(void)
{
    READ(r, "--close", "a\xff");
    CU_ASSERT_EQUAL(r.status, STATUS_INPUT);
    CU_ASSERT_TRUE(says(&r, "--close: the value is not valid UTF-8"));
    done(&r);
}

static void help_names_every_row(void)
{
    struct text s = TEXT_INIT;
    options_help(&s, own);
    options_help(&s, common_options);
    for (const struct option *row = common_options; row->name; row++) {
        CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&s), row->name));
        CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&s), row->help));
    }
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&s), "--close LABEL…"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&s), "-o, --out DIR"));
    text_release(&s);
}

static const struct unit_test tests[] = {
    {"anywhere, both forms", anywhere_and_both_forms},
    {"-- ends options", two_dashes_end_options},
    {"repeated only where marked", repeated_only_where_marked},
    {"unknown gets the nearest name", unknown_gets_nearest},
    {"no abbreviations", no_abbreviations},
    {"values wanted and unwanted", values_wanted_and_unwanted},
    {"whole numbers in range", whole_numbers_in_range},
    {"seed beyond 53 bits", seed_beyond_53_bits},
    {"negative values, a lone dash", negative_values_and_lone_dash},
    {"values are UTF-8", values_are_utf8},
    {"help names every row", help_names_every_row},
    UNIT_END};

int main(void)
{
    return unit_main("options", tests);
}
