/* SPDX-License-Identifier: GPL-3.0-or-later */
/* decide.c: from measures to conditions, decisions and a recommendation. */
#include "analysis/decide.h"

#include <math.h>
#include <stdbool.h>

#include "analysis/measures.h"

/* The Monte Carlo standard errors within which a value counts as close to its threshold. */
static const double CLOSE_ERRORS = 3;

static void evaluate(const struct condition *c, const struct judgement *j,
                     struct condition_result *x)
{
    measure_evaluate(c, j, &x->value, &x->mcse, &x->level);
    x->met = c->above ? x->value > c->threshold : x->value < c->threshold;
    x->close = fabs(x->value - c->threshold) < CLOSE_ERRORS * x->mcse;
    x->imprecise = x->mcse > j->d->precision;
}

static bool holds(const struct conditions *when, const struct condition_result *x)
{
    const bool any = when->join == JOIN_ANY;
    for (size_t i = 0; i < when->count; i++)
        if (x[i].met == any)
            return any;
    return !any;
}

static void evaluate_all(const struct conditions *when, const struct judgement *j,
                         struct decision_result *x)
{
    for (size_t i = 0; i < when->count; i++)
        evaluate(&when->list[i], j, &x->condition[i]);
    x->met = holds(when, x->condition);
}

static bool is_in_force(const struct decision *d, const struct analysis_request *r)
{
    return !r->final && r->point >= d->from && r->observed >= d->min_observed;
}

/* Decisions are read in order; the first that applies and is met acts. */
static enum recommendation interim(const struct analysis *a, const struct design *d)
{
    for (size_t i = 0; i < d->decisions; i++)
        if (a->decision[i].applies && a->decision[i].met)
            return d->decision[i].action == ACTION_STOP_SUCCESS ? RECOMMEND_STOP_SUCCESS
                                                                : RECOMMEND_STOP_FUTILITY;
    return RECOMMEND_CONTINUE;
}

static enum recommendation last(const struct analysis *a, const struct design *d)
{
    if (!d->has_final)
        return RECOMMEND_COMPLETE;
    return a->final_success.met ? RECOMMEND_SUCCESS : RECOMMEND_NO_SUCCESS;
}

void decide(struct analysis *out, const struct judgement *j, const struct analysis_request *r)
{
    const struct design *d = j->d;
    for (size_t i = 0; i < d->decisions; i++) {
        evaluate_all(&d->decision[i].when, j, &out->decision[i]);
        out->decision[i].applies = is_in_force(&d->decision[i], r);
    }
    if (d->has_final) {
        evaluate_all(&d->final_success, j, &out->final_success);
        out->final_success.applies = r->final;
    }
    out->recommendation = r->final ? last(out, d) : interim(out, d);
}
