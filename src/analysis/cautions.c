/* SPDX-License-Identifier: GPL-3.0-or-later */
/* cautions.c: what a reader of an analysis is warned of. */
#include "analysis/cautions.h"

#include <math.h>

#include "analysis/figure_walk.h"
#include "analysis/row_words.h"
#include "base/mem.h"
#include "base/number.h"

enum { NAMED_MOST = 5 };

/* A lack_of_fit_p below this is worth a warning. */
static const double FIT_LEAST = 0.05;

static void append(char ***list, size_t *count, struct text *sentence)
{
    *list = mem_grow(*list, *count + 1, sizeof **list);
    (*list)[(*count)++] = text_take(sentence);
}

void caution_add(struct analysis_diagnostics *g, struct text *sentence)
{
    append(&g->warning, &g->warnings, sentence);
}

static void add_plain(struct analysis *a, const char *sentence)
{
    struct text t = TEXT_INIT;
    text_add(&t, sentence);
    caution_add(&a->diagnostics, &t);
}

static void add_digits(struct text *out, double x, int digits)
{
    char s[NUMBER_CHARS];
    text_add(out, number_significant(s, x, digits));
}

static void add_decimals(struct text *out, double x, int decimals)
{
    char s[NUMBER_CHARS];
    text_add(out, number_fixed(s, x, decimals));
}

/* A sentence that begins with a figure's name. */
static void raise_first(struct text *t)
{
    if (t->length > 0 && t->s[0] >= 'a' && t->s[0] <= 'z')
        t->s[0] = (char)(t->s[0] - 'a' + 'A');
}

static void free_list(char ***list, size_t *count)
{
    for (size_t i = 0; i < *count; i++)
        mem_free((*list)[i]);
    mem_free(*list);
    *list = NULL;
    *count = 0;
}

void caution_release(struct analysis *a)
{
    free_list(&a->diagnostics.warning, &a->diagnostics.warnings);
    free_list(&a->note, &a->notes);
}

/* ---- data ---- */

static void caution_empty(struct analysis *a, const struct design *d, const struct level_data *data,
                          size_t full)
{
    struct text t = TEXT_INIT;
    size_t empty = 0;
    for (size_t k = 0; k < d->levels; k++) {
        if (data->n[k] > 0)
            continue;
        if (empty < NAMED_MOST)
            text_addf(&t, "%s%s", empty ? ", " : "No outcomes yet at ", d->level[k].label);
        empty++;
    }
    if (empty > NAMED_MOST)
        text_addf(&t, " and %zu more", empty - NAMED_MOST);
    text_add(&t, ": what is said there comes from the curve and the priors alone.");
    if (empty > 0 && full > 0)
        caution_add(&a->diagnostics, &t);
    text_release(&t);
}

static void caution_events(struct analysis *a, const struct design *d,
                           const struct level_data *data)
{
    double n = 0, events = 0;
    for (size_t k = 0; k < d->levels; k++) {
        n += data->n[k];
        events += data->events[k];
    }
    if (!(n > 0))
        return;
    if (!(events > 0))
        add_plain(a, "No event at any level so far: how low the rates are, and how they differ, "
                     "comes from the priors.");
    else if (!(events < n))
        add_plain(a, "Every outcome so far is an event: how high the rates are, and how they "
                     "differ, comes from the priors.");
}

void caution_data(struct analysis *a, const struct design *d, const struct level_data *data)
{
    size_t full = 0, one = 0;
    for (size_t k = 0; k < d->levels; k++)
        if (data->n[k] > 0) {
            full++;
            one = k;
        }
    if (full == 0)
        add_plain(a, "No outcomes are in hand: every figure comes from the priors alone.");
    caution_empty(a, d, data, full);
    if (full == 1) {
        struct text t = TEXT_INIT;
        text_addf(&t,
                  "Only %s has outcomes: how the levels differ comes from the curve and the "
                  "priors alone.",
                  d->level[one].label);
        caution_add(&a->diagnostics, &t);
    }
    if (d->type == ENDPOINT_BINARY)
        caution_events(a, d, data);
}

/* ---- the model ---- */

void caution_set_by_prior(struct analysis *a, const struct level_data *data)
{
    struct text t = TEXT_INIT;
    size_t count = 0;
    double n = 0;
    for (size_t k = 0; k < data->levels; k++)
        n += data->n[k];
    for (size_t i = 0; i < a->parameters && n > 0; i++) {
        const struct parameter_result *x = &a->parameter[i];
        if (!parameter_set_by_prior(x))
            continue;
        text_addf(
            &t, "%s%s (",
            count++ ? ", " : "Set by the prior (posterior sd / prior sd above 0.9): ", x->name);
        add_decimals(&t, x->sd_over_prior_sd, 2);
        text_add(&t, ")");
    }
    text_add(&t, ". The data say little there, and what depends on it comes from the prior. A "
                 "sensitivity model with another prior shows how much.");
    if (count > 0)
        caution_add(&a->diagnostics, &t);
    text_release(&t);
}

void caution_fit(struct analysis *a)
{
    struct text t = TEXT_INIT;
    const double p = a->diagnostics.lack_of_fit_p;
    if (!(p < FIT_LEAST))
        return;
    text_add(&t, "The curve does not fit the level means (posterior predictive p ");
    if (p < 0.001)
        text_add(&t, "less than 0.001");
    else
        add_decimals(&t, p, 3);
    text_add(&t, "). Every figure by level leans on the curve: compare the raw data, and consider "
                 "another curve.");
    caution_add(&a->diagnostics, &t);
}

/* ---- computation ---- */

void caution_slice(struct analysis *a, double kish)
{
    struct text t = TEXT_INIT;
    text_add(&t, "The usual sampler did not suit these data (effective share of its proposals ");
    add_decimals(&t, kish, 2);
    text_add(&t, "), so the draws were made by slice sampling.");
    caution_add(&a->diagnostics, &t);
}

void caution_convergence(struct analysis *a)
{
    const struct analysis_diagnostics *g = &a->diagnostics;
    struct text t = TEXT_INIT;
    text_addf(&t, "The computation did not converge in %zu draws: largest R-hat ", g->draws);
    add_digits(&t, g->max_rhat, 4);
    text_add(&t, " (at most 1.01 is asked), smallest effective number of draws ");
    add_decimals(&t, fmin(g->min_ess_bulk, g->min_ess_tail), 0);
    text_add(&t, " (at least 400 is asked). Raise mcmc.max_draws, or give the parameters that the "
                 "data cannot tell apart narrower priors.");
    caution_add(&a->diagnostics, &t);
}

void caution_agreement(struct analysis *a, const struct judgement *first, const struct analysis *b,
                       const struct judgement *second, const struct agreement *x)
{
    const struct walked_figure f = figure_at(first, a, x->worst);
    const struct walked_figure g = figure_at(second, b, x->worst);
    struct text t = TEXT_INIT;
    text_add(&t, "Two methods of computation do not agree: ");
    figure_name(&t, first->d, &f);
    text_add(&t, " is ");
    add_decimals(&t, f.value, 4);
    text_addf(&t, " by %s and ", a->diagnostics.slice ? "slice sampling" : "the usual sampler");
    add_decimals(&t, g.value, 4);
    text_addf(&t, " by %s.", a->diagnostics.second_name);
    caution_add(&a->diagnostics, &t);
}

void caution_precision(struct analysis *a, const struct judgement *j)
{
    struct walked_figure worst = {.mcse = 0};
    size_t count = 0;
    for (size_t i = 0; i < figure_count_all(j->d); i++) {
        const struct walked_figure f = figure_at(j, a, i);
        count += f.mcse > j->d->precision;
        if (f.mcse > worst.mcse)
            worst = f;
    }
    if (count == 0)
        return;
    struct text t = TEXT_INIT;
    text_addf(&t, "The precision asked for, ");
    add_shortest_number(&t, j->d->precision);
    text_addf(&t, ", was not reached in %zu draws by %zu figure%s; the largest Monte Carlo error, ",
              j->draws.n, count, count == 1 ? "" : "s");
    add_digits(&t, worst.mcse, 2);
    text_add(&t, ", is that of ");
    figure_name(&t, j->d, &worst);
    text_add(&t, ". Raise mcmc.max_draws.");
    caution_add(&a->diagnostics, &t);
}

void caution_close(struct analysis *a, const struct judgement *j)
{
    for (size_t i = 0; i < figure_count_all(j->d); i++) {
        const struct walked_figure f = figure_at(j, a, i);
        struct text t = TEXT_INIT;
        if (f.kind != FIGURE_MEASURE || !f.close)
            continue;
        figure_name(&t, j->d, &f);
        raise_first(&t);
        text_add(&t, " is ");
        add_decimals(&t, f.value, 4);
        text_add(&t, ", within 3 Monte Carlo errors of its threshold ");
        add_shortest_number(&t, f.condition->threshold);
        text_addf(&t,
                  " after %zu draws; the computed value decides. Raise mcmc.max_draws to settle "
                  "on which side it lies.",
                  j->draws.n);
        caution_add(&a->diagnostics, &t);
    }
}

/* ---- shares ---- */

static void add_note(struct analysis *a, const char *sentence)
{
    struct text t = TEXT_INIT;
    text_add(&t, sentence);
    append(&a->note, &a->notes, &t);
}

void note_shares(struct analysis *a, const struct share_remarks *remarks)
{
    if (remarks->all_zero)
        add_note(a, "All allocation weights are 0, so the open active levels share equally.");
    if (remarks->no_bounds)
        add_note(a, "The levels that are not dropped cannot keep at_least and at_most, so they "
                    "share equally.");
    if (remarks->filled_up)
        add_note(a, "The levels with a weight above 0 are at at_most; the others share equally "
                    "what is missing.");
}
