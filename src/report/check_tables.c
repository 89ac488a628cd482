/* SPDX-License-Identifier: GPL-3.0-or-later */
/* check_tables.c: the tables of a design in words. */
#include <math.h>

#include "base/base.h"
#include "base/number.h"
#include "report/check_text.h"
#include "report/check_words.h"
#include "report/table.h"

enum { PROBABILITY_DECIMALS = 3, TARGETS_A_TABLE = 4, SCENARIOS_A_TABLE = 4, BAND_STEPS = 100 };

static void add_number(struct table *c, double x)
{
    char s[NUMBER_CHARS];
    table_cell(c, !isfinite(x) ? "–" : number_significant(s, x, 4));
}

/* At most four significant digits, no zeros at the end. */
static void add_brief(struct text *out, double x)
{
    char s[NUMBER_CHARS];
    double rounded = x;
    number_parse(number_significant(s, x, 4), &rounded);
    text_add(out, number_shortest(s, rounded));
}

static void add_fixed(struct table *c, double x, int decimals)
{
    char s[NUMBER_CHARS];
    table_cell(c, number_fixed(s, x, decimals));
}

/* Headings, the first `words` of them over words, the others over numbers. */
static struct table *table_with(const char *const *headings, size_t n, size_t words)
{
    struct table *c = table_new();
    for (size_t i = 0; i < n; i++) {
        table_column(c, headings[i], i >= words);
    }
    return c;
}

static void column_prefixed(struct table *c, const char *prefix, const char *name)
{
    struct text s = TEXT_INIT;
    text_addf(&s, "%s %s", prefix, name);
    table_column(c, text_s(&s), true);
    text_release(&s);
}

void check_table_priors(struct text *out, const struct check_report *r)
{
    static const char *const names[] = {"parameter", "prior", "5%", "50%", "95%"};
    static const double q[] = {0.05, 0.5, 0.95};
    const struct model *m = &r->d->model;
    struct table *c = table_with(names, COUNT_OF(names), 2);
    for (size_t i = 0; i < m->parameters; i++) {
        const struct prior *p = &m->prior[i];
        table_cell(c, m->parameter[i]->name);
        say_prior(table_open(c), p);
        table_next(c);
        for (size_t j = 0; j < 3; j++) {
            bool known = !prior_is_fixed(p);
            add_number(c, known ? prior_quantile(p, q[j]) : NAN);
        }
    }
    table_text(out, c);
    table_free(c);
}

/* Decimals that show the narrowest band in a hundred steps. */
static int band_decimals(const struct band *b, size_t n)
{
    double narrow = INFINITY;
    for (size_t k = 0; k < n; k++) {
        double width = b[k].q95 - b[k].q05;
        narrow = width > 0 && width < narrow ? width : narrow;
    }
    return isfinite(narrow) ? number_decimals_for(narrow / BAND_STEPS, 2) : 2;
}

static void add_band(struct table *c, const struct band *b, int decimals)
{
    add_fixed(c, b->q05, decimals);
    add_fixed(c, b->q50, decimals);
    add_fixed(c, b->q95, decimals);
}

void check_table_responses(struct text *out, const struct check_report *r)
{
    const struct design *d = r->d;
    bool gain = design_has_gain(d), binary = d->type == ENDPOINT_BINARY;
    const char *names[] = {"level", "response 5%", "50%", "95%", "gain 5%", "50%", "95%"};
    names[1] = binary ? "rate 5%" : names[1];
    struct table *c = table_with(names, gain ? 7 : 4, 1);
    int dr = band_decimals(r->bands->response, d->levels);
    int dg = band_decimals(r->bands->gain, d->levels);
    for (size_t k = 0; k < d->levels; k++) {
        table_cell(c, d->level[k].label);
        add_band(c, &r->bands->response[k], dr);
        if (gain) {
            add_band(c, &r->bands->gain[k], dg);
        }
    }
    table_text(out, c);
    table_free(c);
}

static void target_table(struct text *out, const struct check_report *r, size_t from, size_t to)
{
    const struct design *d = r->d;
    struct table *c = table_new();
    table_column(c, "probability that it", false);
    for (size_t i = from; i < to; i++) {
        column_prefixed(c, "is", d->target[i].name);
        column_prefixed(c, "meets", d->target[i].name);
    }
    for (size_t k = 0; k < d->levels; k++) {
        table_cell(c, d->level[k].label);
        for (size_t i = from; i < to; i++) {
            bool active = design_is_active(d, k);
            add_fixed(c, active ? r->prior->level[k].pr_target[i] : NAN, PROBABILITY_DECIMALS);
            add_fixed(c, active ? r->prior->level[k].pr_meets[i] : NAN, PROBABILITY_DECIMALS);
        }
    }
    table_cell(c, "none");
    for (size_t i = from; i < to; i++) {
        add_fixed(c, r->prior->target[i].pr_none, PROBABILITY_DECIMALS);
        table_cell(c, "–");
    }
    table_text(out, c);
    table_free(c);
}

void check_table_targets(struct text *out, const struct check_report *r)
{
    for (size_t from = 0; from < r->d->targets; from += TARGETS_A_TABLE) {
        size_t to = from + TARGETS_A_TABLE < r->d->targets ? from + TARGETS_A_TABLE : r->d->targets;
        text_add(out, from ? "\n" : "");
        target_table(out, r, from, to);
    }
}

static void add_cut(struct table *c, const struct expected_cut *cut, bool failure)
{
    if (!cut->held) {
        table_cell(c, "not held");
        for (int i = 0; i < 4; i++) {
            table_cell(c, "");
        }
        return;
    }
    add_fixed(c, cut->time, 1);
    add_fixed(c, cut->randomized, 0);
    add_fixed(c, cut->observed, 0);
    add_fixed(c, cut->pending, 0);
    add_fixed(c, failure ? NAN : cut->dropped, 0);
}

static void add_cut_name(struct table *c, const struct design *d, size_t i)
{
    text_addf(table_open(c), "%zu, at ", i + 1);
    say_point(table_open(c), d, d->analyses.at[i]);
    table_next(c);
}

void check_table_expected(struct text *out, const struct check_report *r)
{
    const struct expected *x = r->expected;
    bool failure = r->d->dropped == DROPPED_FAILURE;
    const char *names[] = {
        "expected at analysis", r->d->time_unit, "randomized", "observed", "pending", "dropped"};
    struct table *c = table_with(names, COUNT_OF(names), 1);
    bool delayed = false;
    for (size_t i = 0; i < x->count; i++) {
        add_cut_name(c, r->d, i);
        add_cut(c, &x->cut[i], failure);
        delayed = delayed || x->cut[i].delayed;
    }
    table_cell(c, "last");
    add_cut(c, &x->last, failure);
    table_text(out, c);
    table_free(c);
    if (delayed) {
        text_add(out, "  Some cuts wait until the previous decision is in force.\n");
    }
    if (isfinite(x->adapts_from)) {
        char s[NUMBER_CHARS];
        text_addf(out, "  Adapted shares are expected in force from %s %s on.\n", r->d->time_unit,
                  number_fixed(s, x->adapts_from, 1));
    }
}

/* "0.8 (+0.3)": the true response and, in brackets, the true gain. */
static void add_truth(struct table *c, const struct design *d, const struct scenario *s, size_t k)
{
    if (!s->response) {
        table_cell(c, "from the prior");
        return;
    }
    add_brief(table_open(c), s->response[k]);
    double gain = expected_gain(d, s->response, k);
    if (!isnan(gain)) {
        text_add(table_open(c), gain > 0 ? " (+" : " (");
        add_brief(table_open(c), gain);
        text_add(table_open(c), ")");
    }
    table_next(c);
}

/* One number, or "2 to 3" where levels differ. */
static void add_sd(struct table *c, const struct design *d, const struct scenario *s)
{
    if (!s->sd) {
        table_cell(c, "");
        return;
    }
    double low = s->sd[0], high = s->sd[0];
    for (size_t k = 1; k < d->levels; k++) {
        low = fmin(low, s->sd[k]);
        high = fmax(high, s->sd[k]);
    }
    add_shortest_number(table_open(c), low);
    if (high > low) {
        text_add(table_open(c), " to ");
        add_shortest_number(table_open(c), high);
    }
    table_next(c);
}

/* Rows that only some designs need. */
static void scenario_extras(struct table *c, const struct design *d, size_t from, size_t to)
{
    bool trend = false, sd = false;
    for (size_t i = from; i < to; i++) {
        trend = trend || d->scenario[i].trend < 0 || d->scenario[i].trend > 0;
        sd = sd || d->scenario[i].sd;
    }
    if (sd) {
        table_cell(c, "sd of a response");
        for (size_t i = from; i < to; i++) {
            add_sd(c, d, &d->scenario[i]);
        }
    }
    if (trend) {
        text_addf(table_open(c), "trend a %s%s", d->time_unit,
                  d->type == ENDPOINT_BINARY ? " (logit)" : "");
        table_next(c);
        for (size_t i = from; i < to; i++) {
            add_shortest_number(table_open(c), d->scenario[i].trend);
            table_next(c);
        }
    }
}

static void scenario_table(struct text *out, const struct design *d, size_t from, size_t to)
{
    struct table *c = table_new();
    table_column(c, design_has_gain(d) ? "true response (gain)" : "true response", false);
    for (size_t i = from; i < to; i++) {
        table_column(c, d->scenario[i].name, true);
    }
    for (size_t k = 0; k < d->levels; k++) {
        table_cell(c, d->level[k].label);
        for (size_t i = from; i < to; i++) {
            add_truth(c, d, &d->scenario[i], k);
        }
    }
    for (size_t t = 0; t < d->targets; t++) {
        text_addf(table_open(c), "true %s", d->target[t].name);
        table_next(c);
        for (size_t i = from; i < to; i++) {
            const double *m = d->scenario[i].response;
            int level = m ? analysis_true_level(d, t, m) : LEVEL_NONE;
            table_cell(c, !m ? "varies" : level < 0 ? "none" : d->level[level].label);
        }
    }
    scenario_extras(c, d, from, to);
    table_cell(c, "for error rates");
    for (size_t i = from; i < to; i++) {
        table_cell(c, d->scenario[i].is_null ? "null" : "");
    }
    table_text(out, c);
    table_free(c);
}

void check_table_scenarios(struct text *out, const struct check_report *r)
{
    const struct design *d = r->d;
    for (size_t from = 0; from < d->scenarios; from += SCENARIOS_A_TABLE) {
        size_t to =
            from + SCENARIOS_A_TABLE < d->scenarios ? from + SCENARIOS_A_TABLE : d->scenarios;
        text_add(out, from ? "\n" : "");
        scenario_table(out, d, from, to);
    }
}
