/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sensitivity_tables.c: the design's model and its sensitivity models side by side. */
#include "report/sensitivity_tables.h"

#include <math.h>

#include "base/base.h"
#include "base/number.h"
#include "report/analysis_tables.h"
#include "report/figures.h"
#include "report/fit_words.h"

#define DASH "\xE2\x80\x93"

struct analysis_report report_of_model(const struct analysis_report *r, size_t i)
{
    struct analysis_report beside = *r;
    if (i > 0)
        beside.a = &r->a->sensitivity[i - 1];
    return beside;
}

void add_model_name(struct text *out, const struct analysis_report *r, size_t i)
{
    const struct analysis *a = report_of_model(r, i).a;
    if (i == 0)
        text_add(out, "design: ");
    else
        text_addf(out, "%zu: ", i);
    words_model_name(out, a->model);
    if (a->failure)
        text_add(out, " (not fitted)");
    else if (!a->diagnostics.trusted)
        text_add(out, " (not to be used)");
}

static void model_cell(struct table *t, const struct analysis_report *r, size_t i)
{
    add_model_name(table_open(t), r, i);
    table_next(t);
}

/* The name of a group of rows is pale in all but its first. */
static void mark_repeated(struct table *t, size_t i)
{
    if (i > 0)
        table_mark(t, "again");
}

static void number_cell(struct table *t, double x, struct digits g)
{
    figure_number(table_open(t), x, g);
    table_next(t);
}

static void probability_cell(struct table *t, double p, struct digits g)
{
    figure_probability(table_open(t), p, g);
    table_next(t);
}

/* ---- by model ---- */

static void model_row(struct table *t, const struct analysis_report *r, size_t i)
{
    const struct analysis *a = report_of_model(r, i).a;
    const bool shown = likelihood_is_shown(a);
    model_cell(t, r, i);
    probability_cell(t, a->diagnostics.lack_of_fit_p, (struct digits){3, 0});
    /* a walk's likelihood is marginal and does not compare with that of other curves */
    const bool compares = shown && a->model->curve->kind != CURVE_WALK;
    number_cell(t, compares ? a->likelihood.log_likelihood : NAN, (struct digits){2, 0});
    number_cell(t, compares ? a->likelihood.aic : NAN, (struct digits){2, 0});
    number_cell(t, a->diagnostics.max_rhat, (struct digits){3, 0});
    number_cell(t, a->diagnostics.min_ess_bulk, (struct digits){0, 0});
    table_cell(t, a->failure ? "not fitted" : a->diagnostics.trusted ? "yes" : "no");
}

struct table *table_models(const struct analysis_report *r)
{
    static const char *const headings[] = {"Fit p", "Log-likelihood", "AIC", "R-hat", "ESS bulk"};
    struct table *t = table_new();
    table_column(t, "Model", false);
    for (size_t i = 0; i < COUNT_OF(headings); i++)
        table_column(t, headings[i], true);
    table_column(t, "Trusted", false);
    for (size_t i = 0; i <= r->a->sensitivities; i++)
        model_row(t, r, i);
    return t;
}

/* ---- by level ---- */

static const char *const level_keys[] = {"mean",          "sd",         "interval", "gain",
                                         "gain_positive", "likelihood", NULL};

/* The likelihood's column stands where any model has it. */
static bool is_column(const struct level_figure *f, const struct analysis_report *r)
{
    for (size_t i = 0; i <= r->a->sensitivities; i++) {
        const struct analysis_report of = report_of_model(r, i);
        if (level_figure_exists(f, &of))
            return true;
    }
    return false;
}

static void level_row(struct table *t, const struct analysis_report *r, size_t level, size_t i)
{
    const struct analysis_report of = report_of_model(r, i);
    mark_repeated(t, i);
    add_level_name(table_open(t), r, level);
    table_next(t);
    model_cell(t, r, i);
    for (size_t c = 0; level_keys[c]; c++) {
        const struct level_figure *f = level_figure_find(level_keys[c]);
        if (!is_column(f, r))
            continue;
        level_figure_add(table_open(t), f, &of, level);
        table_next(t);
    }
    for (size_t j = 0; j < r->a->targets; j++)
        probability_cell(t, level_can_be_target(r, level) ? of.a->level[level].pr_target[j] : NAN,
                         digits_target(&of));
}

struct table *table_models_by_level(const struct analysis_report *r)
{
    struct table *t = table_new();
    table_column(t, "Level", false);
    table_column(t, "Model", false);
    for (size_t c = 0; level_keys[c]; c++) {
        const struct level_figure *f = level_figure_find(level_keys[c]);
        if (is_column(f, r))
            table_column(t, f->heading[r->d->type == ENDPOINT_BINARY], true);
    }
    for (size_t j = 0; j < r->a->targets; j++)
        table_column(t, r->d->target[j].name, true);
    for (size_t k = 0; k < r->a->levels; k++)
        for (size_t i = 0; i <= r->a->sensitivities; i++)
            level_row(t, r, k, i);
    return t;
}

/* ---- by target ---- */

static void target_row(struct table *t, const struct analysis_report *r, size_t target, size_t i)
{
    const struct analysis_report of = report_of_model(r, i);
    const struct target_result *x = &of.a->target[target];
    mark_repeated(t, i);
    table_cell(t, r->d->target[target].name);
    model_cell(t, r, i);
    table_cell(t, x->selected >= 0 ? r->d->level[x->selected].label
                  : of.a->failure  ? DASH
                                   : "none");
    probability_cell(t, x->selected >= 0 ? x->pr_selected : NAN, digits_target(&of));
    probability_cell(t, x->pr_none, digits_target(&of));
}

struct table *table_models_by_target(const struct analysis_report *r)
{
    struct table *t = table_new();
    table_column(t, "Target", false);
    table_column(t, "Model", false);
    table_column(t, "Selected", false);
    table_column(t, "Is the target", true);
    table_column(t, "No level", true);
    for (size_t j = 0; j < r->a->targets; j++)
        for (size_t i = 0; i <= r->a->sensitivities; i++)
            target_row(t, r, j, i);
    return t;
}

/* ---- by measure ---- */

static void measure_rows(struct table *t, const struct analysis_report *r, const char *name,
                         const struct conditions *when, size_t decision)
{
    const bool final = decision == r->a->decisions;
    for (size_t c = 0; c < when->count; c++)
        for (size_t i = 0; i <= r->a->sensitivities; i++) {
            const struct analysis *a = report_of_model(r, i).a;
            const struct decision_result *d = final ? &a->final_success : &a->decision[decision];
            const struct condition_result *x = &d->condition[c];
            mark_repeated(t, i);
            table_cell(t, name);
            add_measure_brief(table_open(t), r->d, &when->list[c]);
            table_next(t);
            model_cell(t, r, i);
            table_cell(t, x->level >= 0 ? r->d->level[x->level].label : DASH);
            probability_cell(t, x->value, digits_condition(&when->list[c], x));
        }
}

struct table *table_models_by_measure(const struct analysis_report *r)
{
    struct table *t = table_new();
    struct text name = TEXT_INIT;
    table_column(t, "Decision", false);
    table_column(t, "Measure", false);
    table_column(t, "Model", false);
    table_column(t, "Looked at", false);
    table_column(t, "Value", true);
    for (size_t i = 0; i < r->a->decisions; i++) {
        text_clear(&name);
        text_addf(&name, "%zu. %s", i + 1, action_words(r->d->decision[i].action));
        measure_rows(t, r, text_s(&name), &r->d->decision[i].when, i);
    }
    if (r->a->final_success.condition)
        measure_rows(t, r, "Final success", &r->d->final_success, r->a->decisions);
    text_release(&name);
    return t;
}

/* ---- words ---- */

void words_sensitivity(struct text *out, const struct analysis_report *r, size_t i)
{
    const struct analysis *a = report_of_model(r, i).a;
    text_addf(out, "Model %zu: ", i);
    words_model_name(out, a->model);
    text_add(out, ", with priors ");
    words_model_priors(out, a->model);
    text_add(out, ".");
    if (a->failure)
        text_addf(out, " It could not be fitted: %s.", a->failure);
    else if (!a->diagnostics.trusted)
        text_add(out, " Its computation cannot be trusted: its figures are not to be used.");
}
