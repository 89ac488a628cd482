/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plan.c: from a design and a model to what every fit of it shares. */
#include "posterior/plan.h"

#include <math.h>

#include "base/mem.h"
#include "base/vecmath.h"
#include "posterior/marginal.h"
#include "posterior/posterior.h"
#include "posterior/sampler.h"

/* Coordinates are scanned between these quantiles of their priors. */
#define RANGE_TAIL 1e-6

static bool is_normal_or_fixed(const struct prior *p)
{
    return prior_is_fixed(p) || (p->family == prior_normal(0, 1).family && prior_is_computable(p));
}

static enum status check_model(const struct design *d, const struct model *m, struct err *e)
{
    enum status status = STATUS_OK;
    if (!d->control_on_curve && d->control != LEVEL_NONE)
        status = err_add(e, STATUS_INPUT, d->file, 0, "/levels/control_on_curve",
                         "a control off the curve cannot be fitted yet by this version");
    if (m->order == 2)
        status = err_add(e, STATUS_INPUT, d->file, 0, "/model/order",
                         "a walk of order 2 cannot be fitted yet by this version");
    for (size_t i = 0; i < m->parameters; i++) {
        const struct prior *p = &m->prior[i];
        const bool linear = m->parameter[i]->role == ROLE_LINEAR;
        if (linear ? is_normal_or_fixed(p) : prior_is_fixed(p) || prior_is_computable(p))
            continue;
        status = err_add(e, STATUS_INPUT, d->file, 0, "/model/priors",
                         "the prior on %s cannot be computed yet by this version: allowed are %s",
                         m->parameter[i]->name,
                         linear ? "normal and fixed, not truncated"
                                : "half_normal, lognormal, uniform and fixed, not truncated");
    }
    return status;
}

static void plan_shape(struct plan *plan, size_t i)
{
    struct problem *p = &plan->problem;
    const size_t j = p->shapes++;
    const struct parameter *a = plan->m->parameter[i];
    p->coordinate[j] = a->coordinate;
    p->shape_prior[j] = &plan->m->prior[i];
    if (prior_is_fixed(p->shape_prior[j]))
        return;
    const size_t d = p->dims++;
    const double low = prior_quantile(p->shape_prior[j], RANGE_TAIL);
    const double high = prior_quantile(p->shape_prior[j], 1.0 - RANGE_TAIL);
    p->dim_shape[d] = j;
    p->reflect[d] = a->coordinate == COORDINATE_SELF && a->positive;
    plan->range.low[d] = p->reflect[d] ? 0.0 : a->coordinate == COORDINATE_LOG ? vm_log(low) : low;
    plan->range.high[d] = a->coordinate == COORDINATE_LOG ? vm_log(high) : high;
}

static void plan_residual(struct plan *plan, const struct prior *prior)
{
    static const double tiny = 1e-200;
    struct problem *p = &plan->problem;
    p->sd_prior = prior;
    p->sd_free = !prior_is_fixed(prior);
    p->sd_fixed = p->sd_free ? 1.0 : prior->arg[0];
    if (!p->sd_free)
        return;
    plan->range.v_low = vm_log(prior_quantile(prior, RANGE_TAIL));
    plan->range.v_high = vm_log(prior_quantile(prior, 1.0 - RANGE_TAIL));
    double density;
    const double log_tiny = vm_log(tiny);
    prior_log_density(prior, 1, &tiny, &log_tiny, &density);
    plan->sd_vanishes = density < -100.0;
}

static void plan_chain(struct plan *plan)
{
    struct problem *p = &plan->problem;
    const size_t K = p->levels;
    const double mean_gap = (plan->value[K - 1] - plan->value[0]) / (double)(K - 1);
    for (size_t k = 0; k < K; k++) {
        plan->carry[k] = k > 0 && p->curve->kind == CURVE_WALK ? 1.0 : 0.0;
        plan->gap[k] = k > 0 && plan->m->spacing_actual
                           ? (plan->value[k] - plan->value[k - 1]) / mean_gap
                           : 1.0;
    }
    p->carry = plan->carry;
    p->gap = plan->gap;
}

static bool takes_value(const struct conditions *c)
{
    for (size_t i = 0; i < c->count; i++)
        if (c->list[i].measure->allowed & ARG_VALUE)
            return true;
    return false;
}

/* Gains and responses against a value are averages of exact conditional probabilities. */
static bool wants_moments(const struct design *d)
{
    bool wanted = design_has_gain(d) || (d->has_final && takes_value(&d->final_success));
    for (size_t i = 0; i < d->decisions; i++)
        wanted = wanted || takes_value(&d->decision[i].when);
    return wanted && d->type == ENDPOINT_CONTINUOUS;
}

enum status plan_new(struct plan **out, const struct design *d, const struct model *m,
                     struct err *e)
{
    *out = NULL;
    const enum status status = check_model(d, m, e);
    if (status != STATUS_OK)
        return status;
    struct plan *plan = mem_new(1, sizeof *plan);
    plan->d = d;
    plan->m = m;
    struct problem *p = &plan->problem;
    p->math = vecmath();
    p->marginal = marginal_in_force();
    p->kernel = sampler_kernel_in_force();
    p->levels = d->levels;
    p->binary = d->type == ENDPOINT_BINARY;
    p->curve = m->curve;
    p->at = design_curve_levels(d, m, plan->value);
    p->chain = m->curve->kind != CURVE_BASIS;
    p->reference = d->reference_level;
    p->sd_fixed = 1.0;
    plan->moments = wants_moments(d);
    size_t columns = 0;
    for (size_t i = 0; i < m->parameters; i++) {
        const struct prior *prior = &m->prior[i];
        if (m->parameter[i]->role == ROLE_SHAPE)
            plan_shape(plan, i);
        if (m->parameter[i]->role == ROLE_RESIDUAL)
            plan_residual(plan, prior);
        if (m->parameter[i]->role != ROLE_LINEAR)
            continue;
        p->mean[columns] = prior->arg[0];
        p->scale[columns++] = prior_is_fixed(prior) ? 0.0 : prior->arg[1];
    }
    p->slopes = p->chain ? 0 : columns - 1;
    if (p->chain)
        plan_chain(plan);
    *out = plan;
    return STATUS_OK;
}

void plan_free(struct plan *plan)
{
    mem_free(plan);
}

void plan_problem(struct problem *out, const struct plan *plan, const struct level_data *data,
                  double *y)
{
    *out = plan->problem;
    out->n = data->n;
    out->events = data->events;
    out->y = y;
    double filled = 0.0, sum = 0.0, linear = 0.0;
    for (size_t k = 0; k < out->levels; k++) {
        out->n_total += data->n[k];
        filled += data->n[k] > 0.0 ? 1.0 : 0.0;
        out->ss_within += out->binary ? 0.0 : data->ss[k];
        sum += out->binary ? 0.0 : data->n[k] * data->mean[k];
    }
    for (size_t i = 0; i < plan->m->parameters; i++)
        linear += plan->m->parameter[i]->role != ROLE_RESIDUAL ? 1.0 : 0.0;
    out->centre = out->n_total > 0.0 ? sum / out->n_total : 0.0;
    out->mean[0] -= out->centre;
    out->residual_df = out->n_total - (!out->chain && linear < filled ? linear : filled);
    for (size_t k = 0; k < out->levels; k++)
        y[k] = !out->binary && data->n[k] > 0.0 ? data->mean[k] - out->centre : 0.0;
}
