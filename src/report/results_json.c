/* SPDX-License-Identifier: GPL-3.0-or-later */
/* results_json.c: the parts of a result file that analyses, sensitivity models and fits share. */
#include "report/results_json.h"

#include <math.h>

#include "analysis/raw_interval.h"
#include "base/number.h"

void json_key_open(struct json_writer *w, const char *key, char bracket)
{
    json_key(w, key);
    json_open(w, bracket);
}

void json_key_open_inline(struct json_writer *w, const char *key, char bracket)
{
    json_key(w, key);
    json_open_inline(w, bracket);
}

void json_key_strings(struct json_writer *w, const char *key, size_t n, char *const *list)
{
    json_key_open(w, key, '[');
    for (size_t i = 0; i < n; i++)
        json_string(w, list[i]);
    json_close(w);
}

void json_spread(struct json_writer *w, const struct spread *s)
{
    json_key_maybe(w, "mean", s->mean);
    json_key_maybe(w, "sd", s->sd);
    json_key_maybe(w, "q025", s->q025);
    json_key_maybe(w, "q50", s->q50);
    json_key_maybe(w, "q975", s->q975);
}

void json_raw(struct json_writer *w, const struct analysis_report *r, size_t k)
{
    const struct raw_figures f = raw_interval(&r->data->by_level, r->d->type, k);
    json_key_open_inline(w, "raw", '{');
    if (r->d->type == ENDPOINT_BINARY) {
        json_key_number(w, "events", r->data->by_level.events[k]);
        json_key_maybe(w, "rate", f.mean);
    } else {
        json_key_maybe(w, "mean", f.mean);
        json_key_maybe(w, "sd", f.sd);
    }
    json_close(w);
}

void json_response(struct json_writer *w, const struct level_result *l)
{
    json_key_open_inline(w, "response", '{');
    json_spread(w, &l->response);
    json_close(w);
}

void json_gain(struct json_writer *w, const struct analysis_report *r, const struct level_result *l)
{
    if (!design_has_gain(r->d)) {
        json_key_null(w, "gain");
        return;
    }
    json_key_open_inline(w, "gain", '{');
    json_spread(w, &l->gain);
    json_key_maybe(w, "pr_positive", l->pr_positive);
    json_close(w);
}

void json_by_target(struct json_writer *w, const struct analysis_report *r, const char *key,
                    const double *p)
{
    json_key_open_inline(w, key, '{');
    for (size_t t = 0; t < r->a->targets; t++)
        json_key_maybe(w, r->d->target[t].name, p[t]);
    json_close(w);
}

/* The arguments of the condition that were given or have a default, so that two conditions on one
 * measure can be told apart. The condition's own `value` is the key of the result, so the response
 * it compares with is called `response`. */
void json_condition_arguments(struct json_writer *w, const struct design *d,
                              const struct condition *c)
{
    const unsigned allowed = c->measure->allowed;
    json_key_string(w, "measure", c->measure->key);
    if (c->target >= 0)
        json_key_string(w, "target", d->target[c->target].name);
    if (c->level == LEVEL_ANY)
        json_key_string(w, "level", "any");
    else if (c->level >= 0)
        json_key_string(w, "level", d->level[c->level].label);
    if (allowed & ARG_GAIN)
        json_key_number(w, "gain", c->gain);
    if (allowed & ARG_VALUE)
        json_key_number(w, "response", c->value);
    if (allowed & ARG_PER_ARM) {
        json_key_number(w, "per_arm", c->per_arm);
        json_key_number(w, "alpha", c->alpha);
    }
    if (c->link)
        json_key_string(w, "scale", "link");
}

static void parameter(struct json_writer *w, const struct parameter_result *p)
{
    json_open_inline(w, '{');
    json_key_string(w, "name", p->name);
    json_spread(w, &p->value);
    json_key_maybe(w, "rhat", p->diag.rhat);
    json_key_maybe(w, "ess_bulk", p->diag.ess_bulk);
    json_key_maybe(w, "ess_tail", p->diag.ess_tail);
    json_key_maybe(w, "mcse_mean", p->diag.mcse_mean);
    json_key_maybe(w, "sd_over_prior_sd", p->sd_over_prior_sd);
    json_close(w);
}

void json_parameters(struct json_writer *w, const struct analysis *a)
{
    json_key_open(w, "parameters", '[');
    for (size_t p = 0; p < a->parameters; p++)
        parameter(w, &a->parameter[p]);
    json_close(w);
}

/* Nine significant digits: what a numerical maximum is good for. */
static void key_nine(struct json_writer *w, const char *key, double x)
{
    json_key_maybe(w, key, isnan(x) ? x : number_nine(x));
}

void json_likelihood(struct json_writer *w, const struct likelihood_fit *f)
{
    if (!f->exists) {
        json_key_null(w, "likelihood_fit");
        return;
    }
    json_key_open(w, "likelihood_fit", '{');
    json_key_bool(w, "converged", f->converged);
    json_key_string(w, "message", f->message);
    key_nine(w, "log_likelihood", f->converged ? f->log_likelihood : NAN);
    key_nine(w, "aic", f->converged ? f->aic : NAN);
    json_key_open(w, "parameters", '[');
    for (size_t i = 0; i < f->rows; i++) {
        json_open_inline(w, '{');
        json_key_string(w, "name", f->row[i].name);
        key_nine(w, "estimate", f->converged ? f->row[i].estimate : NAN);
        key_nine(w, "se", f->converged ? f->row[i].se : NAN);
        json_close(w);
    }
    json_close(w);
    json_close(w);
}

static void second_method(struct json_writer *w, const struct analysis_diagnostics *g)
{
    if (!g->second_name) {
        json_key_null(w, "second_method");
        return;
    }
    json_key_open_inline(w, "second_method", '{');
    json_key_string(w, "name", g->second_name);
    json_key_maybe(w, "max_difference", g->second_difference);
    json_close(w);
}

void json_diagnostics(struct json_writer *w, const struct analysis_diagnostics *g)
{
    json_key_open(w, "diagnostics", '{');
    json_key_number(w, "chains", (double)g->chains);
    json_key_number(w, "draws", (double)g->draws);
    json_key_maybe(w, "max_rhat", g->max_rhat);
    json_key_maybe(w, "min_ess_bulk", g->min_ess_bulk);
    json_key_maybe(w, "kish", g->kish);
    second_method(w, g);
    json_key_maybe(w, "lack_of_fit_p", g->lack_of_fit_p);
    json_key_bool(w, "trusted", g->trusted);
    json_key_bool(w, "imprecise", g->imprecise);
    json_key_strings(w, "warnings", g->warnings, g->warning);
    json_close(w);
}
