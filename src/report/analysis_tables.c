/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis_tables.c: builds the tables of an analysis. */
#include "report/analysis_tables.h"

#include <math.h>
#include <string.h>

#include "base/number.h"
#include "report/figures.h"

void add_level_name(struct text *out, const struct analysis_report *r, size_t level)
{
    text_add(out, r->d->level[level].label);
    if ((int)level == r->d->control)
        text_add(out, " (control)");
    else if (!r->a->level[level].open)
        text_add(out, " (closed)");
}

static void level_cell(struct table *t, const struct analysis_report *r, size_t level)
{
    add_level_name(table_open(t), r, level);
    table_next(t);
}

/* ---- by level ---- */

struct table *table_levels(const struct analysis_report *r, const char *const *keys)
{
    struct table *t = table_new();
    table_column(t, "Level", false);
    for (size_t i = 0; keys[i]; i++) {
        const struct level_figure *f = level_figure_find(keys[i]);
        if (level_figure_exists(f, r))
            table_column(t, f->heading[r->d->type == ENDPOINT_BINARY], true);
    }
    for (size_t k = 0; k < r->a->levels; k++) {
        level_cell(t, r, k);
        for (size_t i = 0; keys[i]; i++) {
            const struct level_figure *f = level_figure_find(keys[i]);
            if (!level_figure_exists(f, r))
                continue;
            level_figure_add(table_open(t), f, r, k);
            table_next(t);
        }
    }
    return t;
}

/* ---- by target ---- */

static void probability_cell(struct table *t, const struct analysis_report *r, size_t level,
                             double p)
{
    figure_probability(table_open(t), level_can_be_target(r, level) ? p : NAN, digits_target(r));
    table_next(t);
}

struct table *table_targets(const struct analysis_report *r)
{
    struct table *t = table_new();
    table_column(t, "Level", false);
    for (size_t j = 0; j < r->a->targets; j++)
        table_column(t, r->d->target[j].name, true);
    for (size_t k = 0; k < r->a->levels; k++) {
        level_cell(t, r, k);
        for (size_t j = 0; j < r->a->targets; j++)
            probability_cell(t, r, k, r->a->level[k].pr_target[j]);
    }
    table_cell(t, "no level");
    for (size_t j = 0; j < r->a->targets; j++) {
        figure_probability(table_open(t), r->a->target[j].pr_none, digits_target(r));
        table_next(t);
    }
    return t;
}

static void target_row(struct table *t, const struct analysis_report *r, size_t target,
                       size_t level)
{
    const struct level_result *x = &r->a->level[level];
    if (r->a->target[target].selected == (int)level)
        table_mark(t, "selected");
    level_cell(t, r, level);
    probability_cell(t, r, level, x->pr_target[target]);
    probability_cell(t, r, level, x->pr_meets[target]);
    if (r->a->level[0].prior_pr_target)
        probability_cell(t, r, level, x->prior_pr_target[target]);
}

struct table *table_target(const struct analysis_report *r, size_t target)
{
    struct table *t = table_new();
    const bool prior = r->a->level[0].prior_pr_target != NULL;
    table_column(t, "Level", false);
    table_column(t, "Is the target", true);
    table_column(t, "Meets it", true);
    if (prior)
        table_column(t, "Before data", true);
    for (size_t k = 0; k < r->a->levels; k++)
        target_row(t, r, target, k);
    table_cell(t, "no level");
    figure_probability(table_open(t), r->a->target[target].pr_none, digits_target(r));
    table_next(t);
    table_cell(t, "\xE2\x80\x93");
    if (prior)
        table_cell(t, "\xE2\x80\x93");
    return t;
}

/* ---- decisions ---- */

const char *action_words(enum action a)
{
    return a == ACTION_STOP_SUCCESS ? "Stop for success" : "Stop for futility";
}

const char *verdict_words(const struct analysis_report *r, bool applies, bool met)
{
    if (!r->a->diagnostics.trusted)
        return "undetermined";
    if (met)
        return applies ? "met" : "holds, not in force";
    return applies ? "not met" : "not in force";
}

void add_condition(struct text *out, const struct analysis_report *r, const struct condition *c)
{
    char s[NUMBER_CHARS];
    c->measure->sentence(c, r->d, out);
    text_addf(out, c->above ? "; has to be above %s" : "; has to be below %s",
              number_shortest(s, c->threshold));
}

/* None of the draws, or all: three standard errors are what the draws know of the rest. */
static int decimals_of_never(double mcse)
{
    int decimals = 0;
    for (double unit = 1; decimals < 5 && unit / 10 >= 3 * mcse; unit /= 10)
        decimals++;
    return decimals;
}

struct digits digits_condition(const struct condition *c, const struct condition_result *x)
{
    int decimals = number_decimals_for(x->mcse, 3);
    const double distance = fabs(x->value - c->threshold);
    const int apart = distance > 0 ? number_decimals_for(distance, 3) : 3;
    if (apart > decimals)
        decimals = apart;
    if (x->value <= 0 || x->value >= 1)
        decimals = decimals_of_never(x->mcse);
    return (struct digits){decimals < 3 ? 3 : decimals > 5 ? 5 : decimals, 0};
}

void add_measure_brief(struct text *out, const struct design *d, const struct condition *c)
{
    text_add(out, c->measure->key);
    if (c->target >= 0)
        text_addf(out, ", %s", d->target[c->target].name);
    else if (c->level == LEVEL_ANY)
        text_add(out, ", any");
    else if (c->level >= 0)
        text_addf(out, ", %s", d->level[c->level].label);
}

/* A table of conditions being filled. */
struct rows {
    struct table *t;
    const struct analysis_report *r;
    bool brief; /* the measure by its key, not in words */
};

static void condition_row(const struct rows *w, const char *name, const struct condition *c,
                          const struct condition_result *x, bool applies)
{
    char s[NUMBER_CHARS];
    struct table *t = w->t;
    table_cell(t, name);
    if (w->brief)
        add_measure_brief(table_open(t), w->r->d, c);
    else
        c->measure->sentence(c, w->r->d, table_open(t));
    table_next(t);
    table_cell(t, x->level >= 0 ? w->r->d->level[x->level].label : "\xE2\x80\x93");
    figure_probability(table_open(t), x->value, digits_condition(c, x));
    table_next(t);
    figure_error(table_open(t), x->mcse);
    table_next(t);
    text_add(table_open(t), c->above ? "above " : "below ");
    table_cell(t, number_shortest(s, c->threshold));
    text_add(table_open(t), verdict_words(w->r, applies, x->met));
    text_add(table_open(t), x->close ? ", close" : "");
    table_cell(t, x->imprecise ? ", imprecise" : "");
}

static void condition_rows(const struct rows *w, const char *name, const struct conditions *when,
                           const struct decision_result *x)
{
    struct text first = TEXT_INIT;
    text_add(&first, name);
    if (when->join != JOIN_ONE)
        text_add(&first, when->join == JOIN_ALL ? ", all of" : ", any of");
    for (size_t i = 0; i < when->count; i++)
        condition_row(w, text_s(&first), &when->list[i], &x->condition[i], x->applies);
    text_release(&first);
}

struct table *table_decisions(const struct analysis_report *r, bool brief)
{
    const struct rows w = {table_new(), r, brief};
    struct text name = TEXT_INIT;
    table_column(w.t, "Decision", false);
    table_column(w.t, "Measure", false);
    table_column(w.t, "Looked at", false);
    table_column(w.t, "Value", true);
    table_column(w.t, "MC error", true);
    table_column(w.t, "Threshold", true);
    table_column(w.t, "Verdict", false);
    for (size_t i = 0; i < r->a->decisions; i++) {
        text_clear(&name);
        text_addf(&name, "%zu. %s", i + 1, action_words(r->d->decision[i].action));
        condition_rows(&w, text_s(&name), &r->d->decision[i].when, &r->a->decision[i]);
    }
    if (r->a->final_success.condition)
        condition_rows(&w, "Final success", &r->d->final_success, &r->a->final_success);
    text_release(&name);
    return w.t;
}
