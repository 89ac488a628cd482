/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_text.c: writes an analysis for a terminal: what is recommended first, tables after it.
 */
#include "report/analysis_text.h"

#include "report/analysis_tables.h"
#include "report/analysis_words.h"
#include "report/fit_words.h"
#include "report/parameter_tables.h"
#include "report/sensitivity_tables.h"
#include "report/wrap.h"

static void heading(struct text *out, const char *s)
{
    text_addf(out, "\n%s\n", s);
}

/* One paragraph of words, wrapped. */
typedef void words_fn(struct text *out, const struct analysis_report *r);

static void paragraph(struct text *out, const char *first, const struct analysis_report *r,
                      words_fn *words)
{
    struct text t = TEXT_INIT;
    words(&t, r);
    wrap_add(out, first, text_s(&t));
    text_release(&t);
}

static void paragraph_fit(struct text *out, const struct analysis *a,
                          void (*words)(struct text *out, const struct analysis *a))
{
    struct text t = TEXT_INIT;
    words(&t, a);
    wrap_add(out, "  ", text_s(&t));
    text_release(&t);
}

static void add_table(struct text *out, struct table *t)
{
    table_text(out, t);
    table_free(t);
}

static void indented(struct text *out, const char *sentence)
{
    wrap_add(out, "  - ", sentence);
}

static void occasion(struct text *out, const struct analysis_report *r)
{
    words_occasion(out, r);
    if (r->data->cut_text) {
        text_add(out, ", data cut at ");
        words_cut(out, r);
    }
    text_add(out, ". ");
    words_subjects(out, r);
}

static void recommendation(struct text *out, const struct analysis_report *r)
{
    text_addf(out, "Recommendation: %s. ", words_recommendation(r));
    words_why(out, r);
}

static void head(struct text *out, const struct analysis_report *r)
{
    wrap_add(out, "", r->d->title);
    paragraph(out, "", r, occasion);
    if (!r->a->diagnostics.trusted)
        text_add(out, "\n*** " NOT_TO_BE_USED " ***\n");
    text_add(out, "\n");
    paragraph(out, "", r, recommendation);
}

static void levels(struct text *out, const struct analysis_report *r)
{
    static const char *const keys[] = {"randomized",    "observed",   "raw",      "raw_sd",
                                       "mean",          "sd",         "interval", "gain",
                                       "gain_positive", "next_share", NULL};
    heading(out, "Levels");
    add_table(out, table_levels(r, keys));
}

static void targets(struct text *out, const struct analysis_report *r)
{
    if (r->a->targets == 0)
        return;
    heading(out, "Probability that a level is the target");
    add_table(out, table_targets(r));
    for (size_t t = 0; t < r->a->targets; t++) {
        struct text s = TEXT_INIT;
        words_selection(&s, r, t);
        wrap_add(out, "  ", text_s(&s));
        text_release(&s);
    }
}

static void decisions(struct text *out, const struct analysis_report *r)
{
    if (r->a->decisions == 0 && !r->a->final_success.condition)
        return;
    heading(out, "Decisions");
    add_table(out, table_decisions(r, true));
}

static void computation(struct text *out, const struct analysis_report *r)
{
    heading(out, "Parameters");
    add_table(out, table_parameters(r->a, PARAMETER_VALUES));
    paragraph_fit(out, r->a, words_likelihood);
    paragraph_fit(out, r->a, words_lack_of_fit);
    heading(out, "Computation");
    add_table(out, table_parameters(r->a, PARAMETER_DRAWS));
    paragraph(out, "  ", r, words_computation);
}

static void cautions(struct text *out, const struct analysis_report *r)
{
    struct text list = TEXT_INIT;
    if (words_distrust(&list, r, indented) > 0) {
        heading(out, "Cautions");
        text_add(out, text_s(&list));
    }
    text_release(&list);
}

static void sensitivity(struct text *out, const struct analysis_report *r)
{
    if (r->a->sensitivities == 0)
        return;
    heading(out, "Other models (sensitivity; they decide nothing)");
    for (size_t i = 1; i <= r->a->sensitivities; i++) {
        struct text t = TEXT_INIT;
        words_sensitivity(&t, r, i);
        wrap_add(out, "  - ", text_s(&t));
        text_release(&t);
    }
    add_table(out, table_models(r));
    if (r->a->targets > 0) {
        text_add(out, "\n");
        add_table(out, table_models_by_target(r));
    }
    if (r->a->decisions > 0 || r->a->final_success.condition) {
        text_add(out, "\n");
        add_table(out, table_models_by_measure(r));
    }
    text_add(out, "\n");
    add_table(out, table_models_by_level(r));
}

void analysis_text(struct text *out, const struct analysis_report *r)
{
    head(out, r);
    levels(out, r);
    targets(out, r);
    decisions(out, r);
    computation(out, r);
    sensitivity(out, r);
    cautions(out, r);
}
