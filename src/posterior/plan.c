/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plan.c: from a design and a model to what every fit of it shares. */
#include "posterior/plan.h"

#include <math.h>

#include "base/mem.h"
#include "base/vecmath.h"
#include "posterior/marginal.h"
#include "posterior/posterior.h"
#include "posterior/sampler.h"

/* Coordinates are scanned between these quantiles of their priors. Where that range is wider than
 * HEAVY times the middle half, the tails are heavy and the first pass of the scan goes by
 * probability. */
#define RANGE_TAIL 1e-6
#define HEAVY 30.0
/* or, of a number that is positive, where the upper quartile is this many times the lower one */
#define SPREAD_OUT 1000.0
/* Proposals from the prior keep all of it within reach; heavy tails need more of them. */
#define PRIOR_SHARE (1.0 / 64.0)
#define PRIOR_SHARE_HEAVY 0.25
/* Six standard deviations of a stand-in span the prior between these tails, so that heavy ones stay
 * within reach. */
#define FAR_TAIL 2.5e-3
#define FARTHER_TAIL 5e-4 /* without a variance */
/* a standard deviation beyond so many times the middle half says nothing of the middle */
#define TAME 10.0
/* Stand-ins beyond so many times the data's own scale would cost digits: they are drawn in. */
#define WIDEST 1e7
/* ends of a support are moved inward by this share, so that rounding never leaves it */
#define INWARD 1e-12

double problem_quantile(const struct prior *p, double u)
{
    const double x = prior_quantile(p, u);
    return x > PROBLEM_LARGEST ? PROBLEM_LARGEST : x < -PROBLEM_LARGEST ? -PROBLEM_LARGEST : x;
}

double problem_log_quantile(const struct prior *p, double u)
{
    const double x = problem_quantile(p, u), least = 1.0 / PROBLEM_LARGEST;
    return vm_log(x > least ? x : least);
}

double problem_coordinate(const struct problem *p, size_t dim, double u)
{
    const size_t j = p->dim_shape[dim];
    return p->coordinate[j] == COORDINATE_LOG ? problem_log_quantile(p->shape_prior[j], u)
                                              : problem_quantile(p->shape_prior[j], u);
}

/* Ends of the support, log: in the coordinate ln x; kept within numbers that can be squared. */
static void support_edges(const struct prior *p, bool log, double *low, double *high)
{
    const double most = log ? vm_log(PROBLEM_LARGEST) : PROBLEM_LARGEST;
    prior_support(p, low, high);
    if (log) {
        *low = *low > 0.0 ? vm_log(*low) : -INFINITY;
        *high = *high < INFINITY ? vm_log(*high) : INFINITY;
    }
    *low = *low > -most ? *low : -most;
    *high = *high < most ? *high : most;
    *low += INWARD * fabs(*low);
    *high -= INWARD * fabs(*high);
}

/* The range of a coordinate dwarfs the middle half of its prior. */
static bool has_heavy_tails(const struct problem *p, size_t d, const struct coordinate_range *r)
{
    const double low = problem_coordinate(p, d, 0.25), high = problem_coordinate(p, d, 0.75);
    return r->high[d] - r->low[d] > HEAVY * (high - low) ||
           (p->reflect[d] && high > SPREAD_OUT * low);
}

static bool is_infinite_at_zero(const struct prior *prior)
{
    const double x[2] = {1e-200, 1e-100}, log_x[2] = {vm_log(x[0]), vm_log(x[1])};
    double density[2];
    prior_log_density(prior, 2, x, log_x, density);
    return density[0] > density[1] + 1.0;
}

static void plan_coordinate(struct plan *plan, size_t d, const struct prior *prior, bool positive)
{
    struct problem *p = &plan->problem;
    const bool log = p->coordinate[p->dim_shape[d]] == COORDINATE_LOG;
    support_edges(prior, log, &p->edge_low[d], &p->edge_high[d]);
    p->reflect[d] = !log && positive && p->edge_low[d] <= 0.0;
    if (p->reflect[d])
        p->edge_low[d] = 0.0;
    plan->range.low[d] = p->reflect[d] ? 0.0 : problem_coordinate(p, d, RANGE_TAIL);
    plan->range.high[d] = problem_coordinate(p, d, 1.0 - RANGE_TAIL);
    p->heavy[d] = has_heavy_tails(p, d, &plan->range);
}

/* A positive number that is its own coordinate takes its logarithm where its prior piles up at 0 or
 * spreads over orders of magnitude. */
static void plan_shape(struct plan *plan, size_t i)
{
    struct problem *p = &plan->problem;
    const size_t j = p->shapes++;
    const struct parameter *a = plan->m->parameter[i];
    const struct prior *prior = &plan->m->prior[i];
    p->coordinate[j] = a->coordinate;
    p->shape_prior[j] = prior;
    if (prior_is_fixed(prior))
        return;
    const size_t d = p->dims++;
    p->dim_shape[d] = j;
    plan_coordinate(plan, d, prior, a->positive);
    if (p->reflect[d] && (p->heavy[d] || is_infinite_at_zero(prior))) {
        p->coordinate[j] = COORDINATE_LOG;
        plan_coordinate(plan, d, prior, a->positive);
    }
}

static void plan_residual(struct plan *plan, const struct prior *prior)
{
    static const double tiny = 1e-200;
    struct problem *p = &plan->problem;
    p->sd_prior = prior;
    p->sd_free = !prior_is_fixed(prior);
    p->sd_fixed = p->sd_free ? 1.0 : prior_quantile(prior, 0.5);
    if (!p->sd_free)
        return;
    support_edges(prior, true, &p->v_edge_low, &p->v_edge_high);
    plan->range.v_low = problem_log_quantile(prior, RANGE_TAIL);
    plan->range.v_high = problem_log_quantile(prior, 1.0 - RANGE_TAIL);
    double density;
    const double log_tiny = vm_log(tiny);
    prior_log_density(prior, 1, &tiny, &log_tiny, &density);
    plan->sd_vanishes = density < -100.0;
}

/* The normal that stands in for the prior of a linear coefficient; c: its place in `exact`. */
static void plan_linear(struct plan *plan, size_t c, const struct prior *prior, double *mean,
                        double *scale)
{
    struct problem *p = &plan->problem;
    if (prior_is_fixed(prior)) {
        *mean = prior->arg[0];
        *scale = 0.0;
        return;
    }
    if (prior->family == prior_normal(0, 1).family && !prior_is_truncated(prior)) {
        *mean = prior->arg[0];
        *scale = prior->arg[1];
        return;
    }
    const double middle = prior_mean(prior), sd = prior_sd(prior);
    const double quartiles = problem_quantile(prior, 0.75) - problem_quantile(prior, 0.25);
    const bool tame = isfinite(middle) && sd > 0.0 && sd < TAME * quartiles;
    const double tail = tame ? FAR_TAIL : FARTHER_TAIL;
    const double reach =
        (problem_quantile(prior, 1.0 - tail) - problem_quantile(prior, tail)) / 6.0;
    *mean = tame ? middle : problem_quantile(prior, 0.5);
    *scale = tame && sd > reach ? sd : reach;
    double low, high;
    prior_support(prior, &low, &high);
    p->weighed = true;
    p->cliffs = p->cliffs || low > -INFINITY || high < INFINITY;
    p->exact[c] = prior;
    p->stand_in_mean[c] = *mean;
    p->stand_in_sd[c] = *scale;
}

static void plan_order(struct plan *plan)
{
    struct problem *p = &plan->problem;
    const struct design *d = plan->d;
    size_t j = 0;
    p->control = d->control_on_curve ? -1 : d->control;
    for (size_t k = 0; k < p->levels; k++)
        if ((int)k != p->control)
            plan->order[j++] = k;
    if (p->control >= 0)
        plan->order[j] = (size_t)p->control;
    p->order = plan->order;
}

static void plan_chain(struct plan *plan)
{
    struct problem *p = &plan->problem;
    const size_t m = p->at.count;
    const double *x = plan->value, mean_gap = (x[m - 1] - x[0]) / (double)(m - 1);
    for (size_t j = 0; j < p->levels; j++) {
        const bool walks = j > 0 && j < m && p->curve->kind == CURVE_WALK;
        plan->carry[j] = walks ? 1.0 : 0.0;
        plan->gap[j] = walks && plan->m->spacing_actual ? (x[j] - x[j - 1]) / mean_gap : 1.0;
    }
    p->second_order = plan->m->order == 2 && p->curve->kind == CURVE_WALK;
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

static void plan_parameters(struct plan *plan)
{
    struct problem *p = &plan->problem;
    const struct model *m = plan->m;
    size_t columns = 0;
    for (size_t i = 0; i < m->parameters; i++) {
        const struct prior *prior = &m->prior[i];
        if (m->parameter[i]->role == ROLE_SHAPE)
            plan_shape(plan, i);
        if (m->parameter[i]->role == ROLE_RESIDUAL)
            plan_residual(plan, prior);
        if (m->parameter[i]->role == ROLE_CONTROL)
            plan_linear(plan, COLUMNS_MAX, prior, &p->control_mean, &p->control_scale);
        if (m->parameter[i]->role == ROLE_LINEAR) {
            plan_linear(plan, columns, prior, &p->mean[columns], &p->scale[columns]);
            columns++;
        }
    }
    p->slopes = p->chain ? 0 : columns - 1;
}

struct plan *plan_new(const struct design *d, const struct model *m)
{
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
    plan_order(plan);
    plan_parameters(plan);
    if (p->chain)
        plan_chain(plan);
    p->prior_share = p->heavy[0] || p->heavy[1] ? PRIOR_SHARE_HEAVY : PRIOR_SHARE;
    plan->moments = wants_moments(d) && !p->weighed;
    return plan;
}

void plan_free(struct plan *plan)
{
    mem_free(plan);
}

/* Responses are centred on their mean over the curve. */
static void plan_data(struct problem *p, const struct level_data *data)
{
    double sum = 0.0;
    p->n = data->n;
    p->events = data->events;
    for (size_t k = 0; k < p->levels; k++) {
        const bool on = (int)k != p->control;
        p->n_total += data->n[k];
        p->n_curve += on ? data->n[k] : 0.0;
        p->ss_within += p->binary ? 0.0 : data->ss[k];
        sum += !p->binary && on ? data->n[k] * data->mean[k] : 0.0;
    }
    p->centre = p->n_curve > 0.0 ? sum / p->n_curve : 0.0;
    p->mean[0] -= p->centre;
    p->control_mean -= p->centre;
}

/* The data's own scale: level means and responses about them; a logit's is 1. */
static double data_scale(const struct problem *p, const struct level_data *data)
{
    double sum = p->ss_within;
    if (p->binary)
        return 1.0;
    for (size_t k = 0; k < p->levels; k++)
        sum += data->n[k] * (data->mean[k] - p->centre) * (data->mean[k] - p->centre);
    return p->n_total > 0.0 && sum > 0.0 ? sqrt(sum / p->n_total) : 1.0;
}

static void draw_in(double widest, double centre, double *mean, double *scale, double *own_mean,
                    double *own_sd)
{
    if (!(*scale > widest))
        return;
    *mean = 0.0;
    *scale = widest;
    *own_mean = centre;
    *own_sd = widest;
}

/* Stand-ins whose scale dwarfs the data's. Levels are centred, other coefficients are not. */
static void draw_in_stand_ins(struct problem *p, const struct level_data *data)
{
    const double widest = WIDEST * data_scale(p, data);
    for (size_t c = 0; c < COLUMNS_MAX; c++)
        if (p->exact[c])
            draw_in(widest, c == 0 ? p->centre : 0.0, &p->mean[c], &p->scale[c],
                    &p->stand_in_mean[c], &p->stand_in_sd[c]);
    if (p->exact[COLUMNS_MAX])
        draw_in(widest, p->centre, &p->control_mean, &p->control_scale,
                &p->stand_in_mean[COLUMNS_MAX], &p->stand_in_sd[COLUMNS_MAX]);
}

void plan_problem(struct problem *out, const struct plan *plan, const struct level_data *data,
                  double *y)
{
    double filled = 0.0, linear = 0.0;
    *out = plan->problem;
    plan_data(out, data);
    if (out->weighed)
        draw_in_stand_ins(out, data);
    out->y = y;
    for (size_t k = 0; k < out->levels; k++) {
        filled += data->n[k] > 0.0 ? 1.0 : 0.0;
        y[k] = !out->binary && data->n[k] > 0.0 ? data->mean[k] - out->centre : 0.0;
    }
    for (size_t i = 0; i < plan->m->parameters; i++)
        linear += plan->m->parameter[i]->role != ROLE_RESIDUAL ? 1.0 : 0.0;
    out->residual_df = out->n_total - (!out->chain && linear < filled ? linear : filled);
}
