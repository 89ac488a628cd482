/* SPDX-License-Identifier: GPL-3.0-or-later */
/* test_report_svg.c: axes, places of levels, labels, and that every chart is sound markup. */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "markup_check.h"
#include "report/chart.h"
#include "report/figures.h"
#include "report/svg.h"
#include "report/table.h"
#include "unit.h"

static void axes_have_round_ends(void)
{
    struct axis a = axis_round(-3.4, 0.7, 6);
    CU_ASSERT_EQUAL(a.step, 1);
    CU_ASSERT_EQUAL(a.low, -4);
    CU_ASSERT_EQUAL(a.high, 1);
    a = axis_round(0, 21.3, 5);
    CU_ASSERT_EQUAL(a.step, 5);
    CU_ASSERT_EQUAL(a.high, 25);
    a = axis_round(0.9e6, 1.25e6, 6);
    CU_ASSERT_EQUAL(a.step, 1e5);
    a = axis_round(2, 2, 5); /* one value only: parted */
    CU_ASSERT_TRUE(a.low < 2 && a.high > 2);
    a = axis_round(0, 0, 5);
    CU_ASSERT_TRUE(a.low < 0 && a.high > 0);
    CU_ASSERT_DOUBLE_EQUAL(axis_at(&a, 100, 0, 0), 50, 1e-9);
    a = axis_round(0, INFINITY, 5); /* must end, whatever it draws */
    CU_ASSERT_TRUE(a.high > a.low && a.step > 0);
    a = axis_round(0, 5e-324, 5);
    CU_ASSERT_TRUE(a.high > a.low && a.step > 0);
}

static void levels_stand_to_scale_where_labels_fit(void)
{
    static const char *const labels[] = {"a", "b", "c"};
    static const double even[] = {0, 10, 20}, skewed[] = {0, 1, 1000};
    const struct frame f = {.width = 680, .left = 40, .right = 660};
    struct chart_levels l = {3, labels, even, "Dose", -1, NULL};
    double x[LEVEL_PLACES];
    CU_ASSERT_TRUE(levels_fit_to_scale(&l, &f));
    levels_place(&l, &f, true, x);
    CU_ASSERT_DOUBLE_EQUAL(x[1] - x[0], x[2] - x[1], 1e-9);
    CU_ASSERT_TRUE(x[0] >= f.left && x[2] <= f.right);
    l.value = skewed;
    CU_ASSERT_FALSE(levels_fit_to_scale(&l, &f));
    levels_place(&l, &f, false, x);
    CU_ASSERT_DOUBLE_EQUAL(x[1] - x[0], x[2] - x[1], 1e-9);
}

static void long_lists_leave_labels_out(void)
{
    const char *labels[128];
    double values[128], p[129] = {0};
    for (size_t k = 0; k < 128; k++) {
        labels[k] = "level";
        values[k] = (double)k;
    }
    const struct chart_bars c = {.levels = {128, labels, values, "Dose", 100, "none"},
                                 .title = "Probability",
                                 .label = "chart",
                                 .bar_name = {"is", NULL},
                                 .bar = {p, NULL}};
    struct text t = TEXT_INIT;
    chart_bars(&t, &c);
    CU_ASSERT_TRUE(markup_is_sound(text_s(&t)));
    CU_ASSERT_TRUE(markup_count(text_s(&t), ">level<") < 40);
    CU_ASSERT_TRUE(markup_count(text_s(&t), ">level<") > 10);
    CU_ASSERT_EQUAL(markup_count(text_s(&t), "tick strong"),
                    2); /* the marked one, wide and narrow */
    text_release(&t);
}

static void missing_values_are_not_drawn(void)
{
    static const char *const labels[] = {"a", "b", "c"};
    static const double values[] = {1, 2, 3}, gap[] = {0.2, NAN, 0.4}, none[] = {NAN, NAN, NAN};
    const struct chart_response c = {.levels = {3, labels, values, "Dose", -1, NULL},
                                     .title = "Response",
                                     .label = "chart",
                                     .raw_name = "raw",
                                     .posterior_name = "posterior",
                                     .curve_name = "curve",
                                     .raw = gap,
                                     .raw_low = none,
                                     .raw_high = none,
                                     .size = values,
                                     .mean = gap,
                                     .low = gap,
                                     .high = gap,
                                     .reference = NAN};
    struct text t = TEXT_INIT;
    chart_response(&t, &c);
    CU_ASSERT_TRUE(markup_is_sound(text_s(&t)));
    CU_ASSERT_PTR_NULL(strstr(text_s(&t), "nan"));
    CU_ASSERT_EQUAL(markup_count(text_s(&t), "raw-mark"), 2 * (2 + 1)); /* two points and the key */
    text_release(&t);
}

static void text_is_escaped_and_numbers_are_short(void)
{
    struct text t = TEXT_INIT;
    svg_open(&t, 100, 50, "chart", "a \"quoted\" <label>");
    svg_text(&t, "tick", ANCHOR_MIDDLE, 1.04, 2, "<b> & -3");
    svg_close(&t);
    CU_ASSERT_TRUE(markup_is_sound(text_s(&t)));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&t), "&lt;b&gt; &amp; \xE2\x88\x92"
                                              "3"));
    CU_ASSERT_PTR_NOT_NULL(strstr(text_s(&t), "x=\"1\" y=\"2\""));
    text_release(&t);
}

static void lines_break_at_blanks(void)
{
    CU_ASSERT_EQUAL(svg_text_lines(NULL, "", 0, 0, 70, 10, "one two three four"), 2);
    CU_ASSERT_EQUAL(svg_text_lines(NULL, "", 0, 0, 10, 10, "unbreakable"), 1);
    CU_ASSERT_EQUAL(svg_text_lines(NULL, "", 0, 0, 10, 10, ""), 0);
}

static const char *shown(struct text *t, double p, int decimals)
{
    text_clear(t);
    figure_probability(t, p, (struct digits){decimals, 0});
    return text_s(t);
}

static void probabilities_are_never_exactly_0_or_1(void)
{
    struct text t = TEXT_INIT;
    CU_ASSERT_STRING_EQUAL(shown(&t, 0, 3), "<0.001");
    CU_ASSERT_STRING_EQUAL(shown(&t, 1, 3), ">0.999");
    CU_ASSERT_STRING_EQUAL(shown(&t, 0.0006, 3), "0.001");
    CU_ASSERT_STRING_EQUAL(shown(&t, 0.99996, 4), ">0.9999");
    CU_ASSERT_STRING_EQUAL(shown(&t, 0.41237, 3), "0.412");
    CU_ASSERT_STRING_EQUAL(shown(&t, NAN, 3), "\xE2\x80\x93");
    text_release(&t);
}

static void digits_follow_the_error(void)
{
    CU_ASSERT_EQUAL(digits_for(0.0045, 3, 3).decimals, 3);
    CU_ASSERT_EQUAL(digits_for(400, 1e6, 3).decimals, 0);
    CU_ASSERT_EQUAL(digits_for(400, 1e6, 3).significant, 0);
    CU_ASSERT_EQUAL(digits_for(1e-9, 1e-6, 3).significant, 5);
    CU_ASSERT_EQUAL(digits_for(1e4, 1e8, 3).significant, 5);
    CU_ASSERT_EQUAL(digits_for(NAN, 1, 2).decimals, 2);
}

/* A design may name any number of targets, a column each. */
static void tables_have_any_number_of_columns(void)
{
    struct table *t = table_new();
    struct text text = TEXT_INIT;
    for (size_t c = 0; c < 200; c++)
        table_column(t, c ? "col" : "row", c > 0);
    for (size_t c = 0; c < 400; c++)
        table_cell(t, c % 200 ? "1" : "name");
    CU_ASSERT_EQUAL(table_rows(t), 2);
    table_text(&text, t);
    CU_ASSERT_EQUAL(markup_count(text_s(&text), "col"), 199);
    CU_ASSERT_EQUAL(markup_count(text_s(&text), "\n"), 3);
    table_free(t);
    text_release(&text);
}

static const struct unit_test tests[] = {
    {"axes have round ends", axes_have_round_ends},
    {"levels stand to scale where labels fit", levels_stand_to_scale_where_labels_fit},
    {"long lists leave labels out", long_lists_leave_labels_out},
    {"missing values are not drawn", missing_values_are_not_drawn},
    {"text is escaped, numbers are short", text_is_escaped_and_numbers_are_short},
    {"lines break at blanks", lines_break_at_blanks},
    {"probabilities are never exactly 0 or 1", probabilities_are_never_exactly_0_or_1},
    {"tables have any number of columns", tables_have_any_number_of_columns},
    {"digits follow the error", digits_follow_the_error},
    UNIT_END};

int main(void)
{
    return unit_main("report svg", tests);
}
