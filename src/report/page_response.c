/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page_response.c: the figure of the response by level. */
#include "report/page_response.h"

#include <math.h>

#include "report/analysis_tables.h"
#include "report/figures.h"
#include "report/page.h"

static void response_axis_title(struct text *t, const struct analysis_report *r)
{
    const bool binary = r->d->type == ENDPOINT_BINARY;
    text_addf(t, "%s: %s (%s is better)", r->d->endpoint_name,
              binary ? "rate, as a proportion" : "mean, in the units of the data",
              r->d->higher_is_better ? "higher" : "lower");
}

static void response_words(struct text *out, const struct analysis_report *r)
{
    const bool binary = r->d->type == ENDPOINT_BINARY;
    page_paragraph(out, NULL,
                   binary ? "Circles are the raw rates, larger with more outcomes, with Wilson's "
                            "95% interval. They look at each level alone."
                          : "Circles are the raw means, larger with more outcomes, with 95% "
                            "intervals from the spread at that level alone.");
    page_paragraph(out, NULL,
                   "Diamonds are the posterior means with 95% posterior intervals. They borrow "
                   "from the other levels through the model, and from the priors.");
    if (r->a->curve.points > 0)
        page_paragraph(out, NULL,
                       "The line and its band continue the curve between the levels "
                       "studied; only the levels were studied.");
    if (likelihood_has_levels(r->a))
        page_paragraph(out, NULL,
                       r->a->curve.points > 0
                           ? "Short dashes on the broken line are the likelihood fit of the same "
                             "curve, which uses no prior."
                           : "Short dashes are the likelihood fit of the same model, which uses "
                             "no prior.");
    page_paragraph(out, NULL,
                   "Where circles stray from diamonds in a pattern, the curve may not "
                   "suit the data.");
}

static void response_chart(struct text *out, struct sheet *s, const char *label)
{
    const struct analysis_report *r = s->r;
    const struct curve_result *curve = &r->a->curve;
    static const char *const keys[] = {"raw", "raw_interval", "observed", "mean", "interval"};
    struct text title = TEXT_INIT;
    for (size_t i = 0; i < 5; i++)
        sheet_fill(s, i, keys[i], false);
    sheet_fill(s, 5, "raw_interval", true);
    sheet_fill(s, 6, "interval", true);
    sheet_fill(s, 7, "likelihood", false);
    response_axis_title(&title, r);
    const struct chart_response c = {
        .levels = sheet_levels(s, -1, NULL),
        .title = text_s(&title),
        .label = label,
        .raw_name = r->d->type == ENDPOINT_BINARY ? "raw rate, 95%" : "raw mean, 95%",
        .posterior_name = "posterior, 95%",
        .curve_name = "curve, 95% band",
        .raw = s->column[0],
        .raw_low = s->column[1],
        .raw_high = s->column[5],
        .size = s->column[2],
        .mean = s->column[3],
        .low = s->column[4],
        .high = s->column[6],
        .points = curve->points,
        .at = curve->value,
        .curve = curve->mean,
        .curve_low = curve->q025,
        .curve_high = curve->q975,
        .likelihood_name = likelihood_has_levels(r->a) ? "likelihood estimate" : NULL,
        .likelihood = s->column[7],
        .likelihood_curve = curve->likelihood,
        .reference = r->d->has_reference_number ? r->d->reference_number : NAN,
        .reference_name = "reference",
    };
    chart_response(out, &c);
    text_release(&title);
}

void page_response(struct text *out, struct sheet *s, const char *const *keys)
{
    sheet_figure_open(out, s, "Response by level", true, s->n);
    response_chart(out, s,
                   likelihood_has_levels(s->r->a)
                       ? "Chart of the response by level: raw data and posterior, each with 95% "
                         "intervals, and likelihood estimates. The numbers are in the table that "
                         "follows."
                       : "Chart of the response by level: raw data and posterior, each with 95% "
                         "intervals. The numbers are in the table that follows.");
    page_figure_beside(out);
    response_words(out, s->r);
    page_figure_below(out);
    page_table(out, table_levels(s->r, keys),
               design_has_gain(s->r->d)
                   ? "Results by level. The gain is taken against the reference, and is positive "
                     "where the level is better."
                   : "Results by level.");
    page_figure_close(out);
}
