/* SPDX-License-Identifier: GPL-3.0-or-later */
/* page_sensitivity.c: the design's model and its sensitivity models, side by side on the page. */
#include "report/page_sensitivity.h"

#include "base/mem.h"
#include "report/page.h"
#include "report/sensitivity_tables.h"

/* Lines that a reader can tell apart. */
enum { DRAWN_MOST = 4 };

static void chart(struct text *out, struct sheet *s)
{
    const struct analysis_report *r = s->r;
    const size_t all = r->a->sensitivities + 1, n = all < DRAWN_MOST ? all : DRAWN_MOST;
    struct text name[DRAWN_MOST] = {TEXT_INIT};
    struct chart_model model[DRAWN_MOST];
    for (size_t i = 0; i < n; i++) {
        const struct analysis *a = report_of_model(r, i).a;
        add_model_name(&name[i], r, i);
        for (size_t k = 0; k < s->n; k++)
            s->column[i][k] = a->level[k].response.mean;
        model[i] = (struct chart_model){text_s(&name[i]), s->column[i], a->curve.points,
                                        a->curve.value, a->curve.mean};
    }
    const struct chart_models c = {
        .levels = sheet_levels(s, -1, NULL),
        .title = r->d->type == ENDPOINT_BINARY ? "Posterior rate" : "Posterior mean",
        .label = "Chart of the posterior mean by level, one line a model. The numbers are in the "
                 "tables that follow.",
        .n = n,
        .model = model};
    chart_models(out, &c);
    for (size_t i = 0; i < n; i++)
        text_release(&name[i]);
}

static void words(struct text *out, const struct analysis_report *r)
{
    page_paragraph(out, NULL,
                   "The same data under the other models that the design names. They show how much "
                   "of the answer comes from the model; they decide nothing, and change neither "
                   "shares nor decisions.");
    text_add(out, "<ul>\n");
    for (size_t i = 1; i <= r->a->sensitivities; i++) {
        struct text t = TEXT_INIT;
        words_sensitivity(&t, r, i);
        page_item(out, text_s(&t));
        text_release(&t);
    }
    text_add(out, "</ul>\n");
    if (r->a->sensitivities + 1 > DRAWN_MOST)
        page_paragraph(out, NULL, "The chart shows the first three of them; the tables show all.");
}

void page_sensitivity(struct text *out, struct sheet *s)
{
    const struct analysis_report *r = s->r;
    const size_t models = r->a->sensitivities + 1;
    if (r->a->sensitivities == 0)
        return;
    sheet_figure_open(out, s, "Other models", true, s->n * models);
    chart(out, s);
    page_figure_beside(out);
    words(out, r);
    page_figure_below(out);
    page_table(out, table_models(r),
               "Fit and trust of each model. Fit p: posterior predictive p of the level means; "
               "small values say that the curve does not fit. AIC is the likelihood fit's; that of "
               "a walk (ndlm) is of another kind and not to be compared with a curve's.");
    if (r->a->targets > 0)
        page_table(out, table_models_by_target(r),
                   "Targets under each model: the level it would select, the probability that this "
                   "level is the target, and that no level is.");
    if (r->a->decisions > 0 || r->a->final_success.condition)
        page_table(out, table_models_by_measure(r),
                   "Values of the decisions' measures under each model. Only those of the design's "
                   "model decide.");
    page_table(out, table_models_by_level(r),
               "Results by level under each model; the columns named after targets are "
               "probabilities that the level is the target.");
    page_figure_close(out);
}
