/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_selfcheck.c: every built-in check passes as it is, and fails once its input is nudged. */
#include <string.h>

#include "base/base.h"
#include "base/text.h"
#include "report/selfcheck_report.h"
#include "selfcheck/selfcheck.h"
#include "unit.h"

/* How far each check's input is moved: a little more than what it has to notice. */
static const struct {
    const char *key;
    double nudge;
} nudges[] = {
    {"rat42", 0.001},
    {"five_dose_means", 1e-5},
    {"ryegrass", 1e-4},
    {"beetles", 1},
    {"nile", 1},
    {"philox", 1},
    {"sha256", 1},
    {"vecmath", 1e-12},
    {"gamma", 1e-4},
    {"student_t", 0.5},
    {"known_variance", 1e-9},
    {"two_binomials", 1},
    {"two_methods", 0.05},
    {"effective_draws", 0.04},
    {"next_shares", 1e-3},
    {"targets", 1},
};

static double nudge_of(const char *key)
{
    for (size_t i = 0; i < COUNT_OF(nudges); i++)
        if (strcmp(nudges[i].key, key) == 0)
            return nudges[i].nudge;
    return 0;
}

static void passes_and_fails(void)
{
    size_t count = 0;
    for (; checks[count]; count++) {
        const struct check *c = checks[count];
        struct check_result r;
        check_run(&r, c, 0);
        CU_ASSERT(r.passed && r.count > 0);
        for (size_t i = 0; i < r.count; i++)
            if (!r.figure[i].passed)
                fprintf(stderr, "%s: %s: %.12g instead of %.12g (%g allowed)\n", c->key,
                        r.figure[i].what, r.figure[i].ours, r.figure[i].published,
                        r.figure[i].allowed);
        check_release(&r);
        CU_ASSERT(nudge_of(c->key) != 0);
        check_run(&r, c, nudge_of(c->key));
        CU_ASSERT(!r.passed);
        if (r.passed)
            fprintf(stderr, "%s does not notice its nudge\n", c->key);
        check_release(&r);
        CU_ASSERT(strlen(c->source) > 10 && strlen(c->what) > 10);
    }
    CU_ASSERT_EQUAL(count, COUNT_OF(nudges));
}

static void run_unmoved(struct check_result *r, double nudge)
{
    (void)nudge;
    check_add(r, 1, 1, 0, "one");
}

static void run_empty(struct check_result *r, double nudge)
{
    (void)r, (void)nudge;
}

static void verdicts(void)
{
    const struct check one = {"one", "g", "s", "w", run_unmoved, false},
                       none = {"none", "g", "s", "w", run_empty, false};
    struct check_result r;
    check_run(&r, &one, 0);
    CU_ASSERT(r.passed);
    check_add(&r, 2, 2.5, 0.4, "off");
    CU_ASSERT(!r.figure[1].passed);
    check_add(&r, 2, 0.0 / 0.0, 1e9, "no number");
    CU_ASSERT(!r.figure[2].passed);
    check_add_text(&r, "a", "b", "words");
    CU_ASSERT(!r.figure[3].passed);
    check_release(&r);
    check_run(&r, &none, 0);
    CU_ASSERT(!r.passed); /* nothing checked is no pass */
    check_release(&r);
    CU_ASSERT_DOUBLE_EQUAL(check_digits(72.462237576, 6), 5e-5, 1e-12);
    CU_ASSERT_DOUBLE_EQUAL(check_digits(-0.00345, 3), 5e-6, 1e-13);
}

/* A failing check is told as such in all three documents. */
static void documents(void)
{
    const struct check one = {"one", "Group <x>", "Source & more", "What", run_unmoved, false};
    struct check_result r;
    check_run(&r, &one, 0);
    check_add(&r, 2, 3, 0.5, "two");
    r.passed = false;
    const struct selfcheck s = {1, 0, 1, &r};
    struct text text = TEXT_INIT, json = TEXT_INIT, page = TEXT_INIT;
    selfcheck_text(&text, &s);
    selfcheck_json(&json, &s);
    selfcheck_page(&page, &s);
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&text), "one: FAILED"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&text), "0 checks passed, 1 failed"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&json), "\"failed\": 1"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&json), "\"source_sha256\""));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&page), "Source &amp; more"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&page), "FAILED"));
    CU_ASSERT_PTR_NULL(strstr(text_s(&page), "Group <x>"));
    text_release(&text);
    text_release(&json);
    text_release(&page);
    check_release(&r);
}

static const struct unit_test tests[] = {
    {"every check passes, and fails when nudged", passes_and_fails},
    {"verdicts", verdicts},
    {"documents", documents},
    UNIT_END,
};

int main(void)
{
    return unit_main("selfcheck", tests);
}
