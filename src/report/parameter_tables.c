/* SPDX-License-Identifier: GPL-3.0-or-later */
/* parameter_tables.c: builds the tables of parameters. */
#include "report/parameter_tables.h"

#include <math.h>
#include <string.h>

#include "base/base.h"
#include "base/number.h"
#include "report/figures.h"
#include "report/fit_words.h"

#define DASH "\xE2\x80\x93"

static void number_cell(struct table *t, double x, struct digits g)
{
    figure_number(table_open(t), x, g);
    table_next(t);
}

static void shortest_cell(struct table *t, double x)
{
    char s[NUMBER_CHARS];
    table_cell(t, number_shortest(s, x));
}

/* A fixed parameter has a value and nothing else. */
static bool is_fixed(const struct parameter_result *x)
{
    return x->value.sd == 0 && isnan(x->diag.rhat);
}

/* ---- likelihood ---- */

static const struct likelihood_row *likelihood_find(const struct likelihood_fit *f,
                                                    const char *name)
{
    for (size_t i = 0; i < f->rows; i++)
        if (strcmp(f->row[i].name, name) == 0)
            return &f->row[i];
    return NULL;
}

/* Three significant digits of the standard error. */
static void likelihood_cells(struct table *t, const struct likelihood_row *x)
{
    const struct digits g =
        x ? digits_for(x->se / 100, fabs(x->estimate), 4) : (struct digits){0, 0};
    number_cell(t, x ? x->estimate : NAN, g);
    number_cell(t, x ? x->se : NAN, g);
}

static bool is_parameter(const struct analysis *a, const char *name)
{
    for (size_t p = 0; p < a->parameters; p++)
        if (strcmp(a->parameter[p].name, name) == 0)
            return true;
    return false;
}

/* ---- rows ---- */

static void posterior_cells(struct table *t, const struct parameter_result *x)
{
    const struct spread *v = &x->value;
    const struct digits g = digits_for(x->diag.mcse_mean, fabs(v->q975), 4);
    number_cell(t, v->mean, g);
    number_cell(t, v->sd, g);
    number_cell(t, v->q50, g);
    figure_interval(table_open(t), v->q025, v->q975, g);
    table_next(t);
}

static void fixed_cells(struct table *t, const struct parameter_result *x)
{
    shortest_cell(t, x->value.mean);
    for (size_t i = 0; i < 3; i++)
        table_cell(t, DASH);
}

static void draws_cells(struct table *t, const struct convergence *c)
{
    number_cell(t, c->rhat, (struct digits){3, 0});
    number_cell(t, c->ess_bulk, (struct digits){0, 0});
    number_cell(t, c->ess_tail, (struct digits){0, 0});
    figure_error(table_open(t), c->mcse_mean);
    table_next(t);
}

static void values_cells(struct table *t, const struct analysis *a, size_t p)
{
    const struct parameter_result *x = &a->parameter[p];
    if (likelihood_is_shown(a) && is_fixed(x)) {
        shortest_cell(t, x->value.mean);
        table_cell(t, DASH);
    } else if (likelihood_is_shown(a)) {
        likelihood_cells(t, likelihood_find(&a->likelihood, x->name));
    }
    if (is_fixed(x))
        fixed_cells(t, x);
    else
        posterior_cells(t, x);
    number_cell(t, x->sd_over_prior_sd, (struct digits){2, 0});
    words_prior(table_open(t), &a->model->prior[p]);
    text_add(table_open(t), parameter_set_by_prior(x) ? "; set by the prior" : "");
    table_next(t);
}

static void likelihood_only_row(struct table *t, const struct likelihood_row *x, unsigned parts)
{
    const size_t rest = 6 + (parts & PARAMETER_DRAWS ? 4 : 0);
    table_cell(t, x->name);
    likelihood_cells(t, x);
    for (size_t i = 0; i < rest; i++)
        table_cell(t, DASH);
}

/* ---- tables ---- */

static void columns(struct table *t, const struct analysis *a, unsigned parts)
{
    static const char *const values[] = {"Posterior mean", "SD", "50%", "95%", "SD / prior SD"};
    static const char *const draws[] = {"R-hat", "ESS bulk", "ESS tail", "MC error"};
    table_column(t, "Parameter", false);
    if (parts & PARAMETER_VALUES) {
        if (likelihood_is_shown(a)) {
            table_column(t, "Likelihood", true);
            table_column(t, "SE", true);
        }
        for (size_t i = 0; i < COUNT_OF(values); i++)
            table_column(t, values[i], true);
        table_column(t, "Prior", false);
    }
    for (size_t i = 0; i < COUNT_OF(draws) && parts & PARAMETER_DRAWS; i++)
        table_column(t, draws[i], true);
}

struct table *table_parameters(const struct analysis *a, unsigned parts)
{
    struct table *t = table_new();
    columns(t, a, parts);
    for (size_t p = 0; p < a->parameters; p++) {
        table_cell(t, a->parameter[p].name);
        if (parts & PARAMETER_VALUES)
            values_cells(t, a, p);
        if (parts & PARAMETER_DRAWS)
            draws_cells(t, &a->parameter[p].diag);
    }
    const size_t rows = likelihood_is_shown(a) && parts & PARAMETER_VALUES ? a->likelihood.rows : 0;
    for (size_t i = 0; i < rows; i++)
        if (!is_parameter(a, a->likelihood.row[i].name))
            likelihood_only_row(t, &a->likelihood.row[i], parts);
    return t;
}
