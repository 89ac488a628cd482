/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fit_text.c: a fit for the terminal, and the sentences that it shares with the page. */
#include "base/number.h"
#include "report/analysis_tables.h"
#include "report/analysis_words.h"
#include "report/figures.h"
#include "report/fit_report.h"
#include "report/fit_words.h"
#include "report/parameter_tables.h"
#include "report/wrap.h"

void words_fit_data(struct text *out, const struct fit_report *f)
{
    figure_count(out, f->table->data.observed);
    text_addf(out, " %s at %zu levels, from %s", f->table->binary ? "subjects" : "responses",
              f->table->levels, f->table->groups ? "groups" : "rows");
    if (f->table->left_out > 0) {
        text_add(out, " (");
        figure_count(out, f->table->left_out);
        text_add(out, " without a response left out)");
    }
}

static void add_rounded(struct text *out, double x)
{
    char s[NUMBER_CHARS];
    text_add(out, number_significant(s, x, 5));
}

void words_fit_priors(struct text *out, const struct fit_report *f)
{
    const struct design *d = f->r.d;
    if (!d->has_scales) {
        text_add(out, "Priors that were not given are the defaults for a binary endpoint, on the "
                      "logit: centre 0, scale 1.5.");
        return;
    }
    text_add(out, "Priors that were not given are made from these data (only a fit does so): "
                  "centre C = ");
    add_rounded(out, d->scales.C);
    text_add(out, ", the mean of the level means, and scale A = ");
    add_rounded(out, d->scales.A);
    text_add(out, ", the larger of half their range and the pooled SD.");
}

static void heading(struct text *out, const char *s)
{
    text_addf(out, "\n%s\n", s);
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

static void head(struct text *out, const struct fit_report *f)
{
    struct text t = TEXT_INIT;
    words_model_name(&t, &f->r.d->model);
    text_addf(&t, ": %s. ", model_formula(&f->r.d->model));
    words_fit_data(&t, f);
    text_add(&t, ".");
    wrap_add(out, "", text_s(&t));
    text_release(&t);
    if (!f->r.a->diagnostics.trusted)
        text_add(out, "\n*** " NOT_TO_BE_USED " ***\n");
}

static void parameters(struct text *out, const struct fit_report *f)
{
    struct text t = TEXT_INIT;
    heading(out, "Parameters: likelihood and posterior");
    add_table(out, table_parameters(f->r.a, PARAMETER_VALUES));
    words_likelihood(&t, f->r.a);
    text_add(&t, " ");
    words_fit_priors(&t, f);
    wrap_add(out, "  ", text_s(&t));
    text_clear(&t);
    words_lack_of_fit(&t, f->r.a);
    wrap_add(out, "  ", text_s(&t));
    text_release(&t);
}

static void computation(struct text *out, const struct fit_report *f)
{
    struct text t = TEXT_INIT, list = TEXT_INIT;
    heading(out, "Computation");
    add_table(out, table_parameters(f->r.a, PARAMETER_DRAWS));
    words_computation(&t, &f->r);
    wrap_add(out, "  ", text_s(&t));
    if (words_distrust(&list, &f->r, indented) > 0) {
        heading(out, "Cautions");
        text_add(out, text_s(&list));
    }
    text_release(&t);
    text_release(&list);
}

void fit_text(struct text *out, const struct fit_report *f)
{
    static const char *const keys[] = {"observed", "raw", "raw_sd",   "likelihood",
                                       "mean",     "sd",  "interval", NULL};
    head(out, f);
    heading(out, "Data and fitted response by level");
    add_table(out, table_levels(&f->r, keys));
    parameters(out, f);
    computation(out, f);
}
