/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_report_page.c: report.html and the tables for the terminal: sound markup, escaping, one
 * self-contained file, marks of distrust, the order words first. */
#include <ctype.h>
#include <stdlib.h>
#include <string.h>

#include "base/mem.h"
#include "markup_check.h"
#include "report/analysis_page.h"
#include "report/analysis_text.h"
#include "report_fixture.h"
#include "unit.h"

typedef void writer_fn(struct text *out, const struct analysis_report *r);

static char *written(writer_fn *write, enum fixture_kind kind)
{
    struct fixture *f = fixture_new(kind);
    struct text t = TEXT_INIT;
    write(&t, fixture_report(f));
    fixture_free(f);
    return text_take(&t);
}

static const enum fixture_kind kinds[] = {FIXTURE_ITCH,  FIXTURE_DAYS, FIXTURE_DISTRUSTED,
                                          FIXTURE_FINAL, FIXTURE_MANY, FIXTURE_MODELS};

/* "nan" or "inf" as a word of its own, as printf would write a number that does not exist. */
static size_t broken_numbers(const char *s)
{
    size_t n = 0;
    for (const char *p = s; *p; p++) {
        const bool begins = p == s || !isalpha((unsigned char)p[-1]);
        const bool word = strncmp(p, "nan", 3) == 0 || strncmp(p, "inf", 3) == 0;
        n += begins && word && !isalpha((unsigned char)p[3]);
    }
    return n;
}

static void pages_are_sound(void)
{
    for (size_t i = 0; i < sizeof kinds / sizeof kinds[0]; i++) {
        char *page = written(analysis_page, kinds[i]);
        CU_ASSERT_TRUE(markup_is_sound(page));
        CU_ASSERT_EQUAL(broken_numbers(page), 0);
        mem_free(page);
    }
}

static void pages_need_nothing_else(void)
{
    char *page = written(analysis_page, FIXTURE_ITCH);
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "default-src 'none'"));
    CU_ASSERT_EQUAL(markup_count(page, "http://") + markup_count(page, "https://"), 0);
    CU_ASSERT_EQUAL(markup_count(page, "<link") + markup_count(page, "<script"), 0);
    CU_ASSERT_EQUAL(markup_count(page, "src=\"") + markup_count(page, "@import"), 0);
    mem_free(page);
}

static void what_a_user_wrote_is_escaped(void)
{
    char *page = written(analysis_page, FIXTURE_MANY);
    CU_ASSERT_PTR_NULL(strstr(page, "<wide>"));
    CU_ASSERT_PTR_NULL(strstr(page, "<tags>"));
    CU_ASSERT_PTR_NULL(strstr(page, "T<1>"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "A &lt;wide&gt; &quot;range&quot; &amp; more"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "dose &lt;128&gt; &amp; &quot;x&quot;"));
    mem_free(page);
}

static void distrusted_pages_are_marked(void)
{
    char *page = written(analysis_page, FIXTURE_DISTRUSTED);
    char *text = written(analysis_text, FIXTURE_DISTRUSTED);
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "<p class=\"banner\" role=\"alert\">Not to be used</p>"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "class=\"watermark\""));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "<p class=\"verdict\">Undetermined</p>"));
    CU_ASSERT_PTR_NULL(strstr(page, "Next share"));
    CU_ASSERT_PTR_NULL(strstr(page, ">not met<"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "R-hat of ED50 is 1.31"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "*** Not to be used ***"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "Recommendation: Undetermined."));
    mem_free(page);
    mem_free(text);
}

static void trusted_pages_are_not_marked(void)
{
    char *page = written(analysis_page, FIXTURE_ITCH);
    char *text = written(analysis_text, FIXTURE_ITCH);
    CU_ASSERT_PTR_NULL(strstr(page, "class=\"banner\""));
    CU_ASSERT_PTR_NULL(strstr(page, "Not to be used"));
    CU_ASSERT_PTR_NULL(strstr(text, "Not to be used"));
    mem_free(page);
    mem_free(text);
}

static void words_come_before_figures(void)
{
    char *page = written(analysis_page, FIXTURE_ITCH);
    static const char *const order[] = {"id=\"answer\"",     "id=\"analysed\"", "id=\"why\"",
                                        "id=\"sure\"",       "id=\"distrust\"", "id=\"figures\"",
                                        "id=\"parameters\"", "id=\"origin\"",   "id=\"use\""};
    const char *from = page;
    for (size_t i = 0; i < sizeof order / sizeof order[0]; i++) {
        const char *found = strstr(page, order[i]);
        CU_ASSERT_TRUE(found != NULL && found >= from);
        from = found ? found : from;
    }
    mem_free(page);
}

static void every_figure_has_title_axes_and_table(void)
{
    char *page = written(analysis_page, FIXTURE_ITCH);
    const size_t figures = markup_count(page, "<figure ");
    CU_ASSERT_EQUAL(figures, 6); /* response, three targets, allocation, decisions */
    CU_ASSERT_EQUAL(markup_count(page, "<figcaption>"), figures);
    CU_ASSERT_EQUAL(markup_count(page, "<svg class=\"chart wide\" role=\"img\""), figures);
    CU_ASSERT_EQUAL(markup_count(page, "<svg class=\"chart narrow\" role=\"img\""), figures);
    CU_ASSERT_EQUAL(markup_count(page, "<table>"), figures + 3);
    CU_ASSERT_EQUAL(markup_count(page, "Dose (mg)</text>"), 2 * 5);
    mem_free(page);
}

static void absent_parts_leave_no_trace(void)
{
    char *page = written(analysis_page, FIXTURE_DAYS);
    CU_ASSERT_EQUAL(markup_count(page, "<figure "), 3); /* no decisions */
    CU_ASSERT_PTR_NULL(strstr(page, ">Gain<"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, ">Raw rate<"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "8 days (closed)"));
    CU_ASSERT_EQUAL(markup_count(page, "No outcomes yet at 4 days"), 1); /* said once */
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "3 who dropped out count as failures"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "cannot be told apart within Monte Carlo error"));
    mem_free(page);
}

static void a_fraction_is_relative_to_the_levels(void)
{
    char *page = written(analysis_page, FIXTURE_ITCH);
    CU_ASSERT_EQUAL(markup_count(page, "relative to the levels studied"), 1); /* ED90 only */
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "90% of the largest active gain. This is relative"));
    mem_free(page);
}

static void final_with_pending_is_marked(void)
{
    char *page = written(analysis_page, FIXTURE_FINAL);
    char *text = written(analysis_text, FIXTURE_FINAL);
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "Final analysis, with outcomes pending"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "<p class=\"verdict\">No success</p>"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "this is the last analysis"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "24 subjects have no outcome yet"));
    mem_free(page);
    mem_free(text);
}

static void terminal_tables_line_up(void)
{
    char *text = written(analysis_text, FIXTURE_ITCH);
    const char *head = strstr(text, "\n  Level "), *row = strstr(text, "\n  80 mg ");
    CU_ASSERT_TRUE_FATAL(head && row);
    CU_ASSERT_EQUAL(strcspn(head + 1, "\n"), strcspn(row + 1, "\n"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, ">0.999"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "Recommendation: Continue."));
    CU_ASSERT_EQUAL(broken_numbers(text), 0);
    mem_free(text);
}

static void likelihood_stands_beside_the_posterior(void)
{
    char *page = written(analysis_page, FIXTURE_MODELS);
    char *text = written(analysis_text, FIXTURE_MODELS);
    /* six levels and the key, wide and narrow; the curve and its key */
    CU_ASSERT_EQUAL(markup_count(page, "class=\"likelihood-mark\""), 2 * (6 + 1));
    CU_ASSERT_EQUAL(markup_count(page, "class=\"likelihood\""), 2 * (1 + 1));
    CU_ASSERT_EQUAL(markup_count(page, ">likelihood estimate</text>"), 2);
    CU_ASSERT_PTR_NOT_NULL(strstr(page, ">Likelihood mean</th>"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "drift_variance"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "log-likelihood -231.212 and AIC 470.425"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "normal, mean 0, sd 4; set by the prior"));
    CU_ASSERT_EQUAL(markup_count(text, "; set by the prior"), 1);
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "\n  ED50         "));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "3.704  0.250"));
    mem_free(page);
    mem_free(text);
}

static void a_likelihood_fit_that_does_not_exist(void)
{
    char *none = written(analysis_text, FIXTURE_ITCH);
    char *failed = written(analysis_text, FIXTURE_FINAL);
    char *page = written(analysis_page, FIXTURE_FINAL);
    CU_ASSERT_PTR_NOT_NULL(strstr(none, "There is no likelihood fit"));
    CU_ASSERT_PTR_NOT_NULL(strstr(failed, "ED50 runs off beyond the levels."));
    CU_ASSERT_PTR_NULL(strstr(failed, "Likelihood"));
    CU_ASSERT_PTR_NULL(strstr(page, "class=\"likelihood"));
    CU_ASSERT_PTR_NULL(strstr(page, "Likelihood mean"));
    mem_free(none);
    mem_free(failed);
    mem_free(page);
}

static void other_models_stand_beside(void)
{
    char *page = written(analysis_page, FIXTURE_MODELS);
    char *text = written(analysis_text, FIXTURE_MODELS);
    CU_ASSERT_EQUAL(markup_count(page, "<figure "), 7);
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "1: ndlm"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "2: emax (not to be used)"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "3: emax (not fitted)"));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "It could not be fitted: the posterior may be improper."));
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "they decide nothing"));
    /* six levels times four models, less the one without numbers */
    CU_ASSERT_EQUAL(markup_count(page, "class=\"model-mark model-"), 2 * (6 * 3 + 4));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "Sensitivity model 3 could not be fitted"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text, "computation of sensitivity model 2 cannot be trusted"));
    CU_ASSERT_EQUAL(broken_numbers(text), 0);
    mem_free(page);
    mem_free(text);
}

static void fit_of_the_level_means(void)
{
    char *page = written(analysis_page, FIXTURE_MODELS);
    char *none = written(analysis_page, FIXTURE_ITCH);
    CU_ASSERT_PTR_NOT_NULL(strstr(page, "from the curve in 0.400 of repetitions"));
    CU_ASSERT_PTR_NOT_NULL(strstr(none, "fewer than two levels have outcomes"));
    mem_free(page);
    mem_free(none);
}

/* The checker itself can fail. */
static void the_checker_sees_faults(void)
{
    CU_ASSERT_TRUE(markup_is_sound("<p class=\"a\">x &amp; y</p>"));
    CU_ASSERT_FALSE(markup_is_sound("<p>x"));
    CU_ASSERT_FALSE(markup_is_sound("<p><b>x</p></b>"));
    CU_ASSERT_FALSE(markup_is_sound("<p>a & b</p>"));
    CU_ASSERT_FALSE(markup_is_sound("<p class=a>b</p>"));
    CU_ASSERT_FALSE(markup_is_sound("<p id=\"a\"></p><p id=\"a\"></p>"));
    CU_ASSERT_EQUAL(broken_numbers("x=\"nan\" inf"), 2);
    CU_ASSERT_EQUAL(broken_numbers("infinite information, nano"), 0);
}

static const struct unit_test tests[] = {
    {"pages are sound", pages_are_sound},
    {"pages need nothing else", pages_need_nothing_else},
    {"what a user wrote is escaped", what_a_user_wrote_is_escaped},
    {"distrusted pages are marked", distrusted_pages_are_marked},
    {"trusted pages are not marked", trusted_pages_are_not_marked},
    {"words come before figures", words_come_before_figures},
    {"every figure has title, axes and table", every_figure_has_title_axes_and_table},
    {"absent parts leave no trace", absent_parts_leave_no_trace},
    {"a fraction is relative to the levels studied", a_fraction_is_relative_to_the_levels},
    {"a final analysis with pending subjects is marked", final_with_pending_is_marked},
    {"terminal tables line up", terminal_tables_line_up},
    {"the likelihood stands beside the posterior", likelihood_stands_beside_the_posterior},
    {"a likelihood fit that does not exist", a_likelihood_fit_that_does_not_exist},
    {"other models stand beside", other_models_stand_beside},
    {"fit of the level means", fit_of_the_level_means},
    {"the checker sees faults", the_checker_sees_faults},
    UNIT_END};

int main(void)
{
    return unit_main("report page", tests);
}
