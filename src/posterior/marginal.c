/* SPDX-License-Identifier: GPL-3.0-or-later */
/* marginal.c: likelihoods with the linear part integrated out: which part, and the binomial. */
#include "posterior/marginal_lanes.h"

static const struct linear_part *part_of(const struct problem *p)
{
    if (!p->chain)
        return &ISA_NAME(linear_basis);
    return p->second_order ? &ISA_NAME(linear_trend) : &ISA_NAME(linear_chain);
}

static void factor(const struct problem *p, size_t n, const double *x, const double *shape0,
                   const struct observations *o, double *out, double *log_m)
{
    part_of(p)->factor(p, n, x, shape0, o, out, log_m);
}

static void draw(const struct problem *p, size_t n, const double *x, const double *f,
                 const double *normal, double *theta, double *beta)
{
    part_of(p)->draw(p, n, x, f, normal, theta, beta);
}

static void moments(const struct problem *p, size_t n, const double *x, const double *f,
                    size_t stride, double *mean, double *sd, double *difference_mean,
                    double *difference_sd)
{
    const struct moment_rows out = {mean, sd, difference_mean, difference_sd, stride};
    part_of(p)->moments(p, n, x, f, &out);
}

static void binomial(const struct problem *p, size_t n, const double *theta,
                     const struct observations *o, double *out, double *response)
{
    EACH_POINT (n) {
        vd sum = v_set(0);
        for (size_t k = 0; k < p->levels; k++) {
            const vd t = v_load(theta + k * n + i);
            const vd d = t - v_load(o->y + k * n + i);
            vd rate;
            const vd softplus = v_softplus(t, &rate);
            sum += p->events[k] * t - p->n[k] * softplus + 0.5 * v_load(o->w + k * n + i) * d * d;
            v_store(response + k * n + i, rate);
        }
        v_store(out + i, sum);
    }
}

/* y = theta + (events - n rate) / w, w = n rate (1 - rate): Fisher scoring as weighted least
 * squares (McCullagh & Nelder 1989, Generalized Linear Models, 2.5) */
static void pseudo(const struct problem *p, size_t n, const double *theta, double *y, double *w)
{
    EACH_POINT (n)
        for (size_t k = 0; k < p->levels; k++) {
            const vd t = v_load(theta + k * n + i);
            const vd rate = v_logistic(t);
            const vd weight = v_max(p->n[k] * (rate * (1.0 - rate)), v_set(1e-10 * p->n[k]));
            const vd safe = v_pick(weight > 0.0, weight, v_set(1));
            v_store(w + k * n + i, weight);
            v_store(y + k * n + i, t + (p->events[k] - p->n[k] * rate) / safe);
        }
}

const struct marginal ISA_NAME(marginal) = {factor, draw, moments, binomial, pseudo};
