/* SPDX-License-Identifier: GPL-3.0-or-later */
/* scripted_posterior.h: a posterior that takes the place of the library's in one test program:
 * independent normal draws whose convergence, doubts and second method follow a script, so that
 * every path of a live fit is walked. Included once; it defines every function of posterior.h.
 */
#ifndef TERRACE_TEST_SCRIPTED_POSTERIOR_H
#define TERRACE_TEST_SCRIPTED_POSTERIOR_H

#include <math.h>

#include "base/mem.h"
#include "base/vecmath.h"
#include "posterior/likelihood_fit.h"
#include "posterior/posterior.h"
#include "tiny_world.h"

enum { LEVELS = 3, CALLS = 32, SECOND = 20000 };

struct plan {
    const struct design *d;
};

struct posterior {
    const struct design *d;
    double *x, *second;
    size_t total;
    bool slice;
};

static struct script {
    double mean[LEVELS];       /* of the level responses, sd 1 */
    size_t converges_at;       /* first length with a small R-hat */
    size_t slice_converges_at; /* the same of the slice sampler */
    bool doubtful, distrusted;
    double shift, slice_shift; /* what the second method finds differs by this in level 2 */
    size_t lengths[CALLS], calls;
    bool by_slice[CALLS];
} script;

/* Normal draws, level by level independent; `salt` names the stream. */
static double *normal_draws(size_t n, uint64_t salt, double shift)
{
    uint64_t state = salt;
    double *x = mem_new(n * LEVELS, sizeof *x);
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < LEVELS; k++) {
            const double u = ((double)tiny_random(&state, 1u << 30) + 0.5) / (1u << 30);
            x[k * n + i] = script.mean[k] + (k == 2 ? shift : 0) + vm_normal_quantile(u);
        }
    return x;
}

struct plan *plan_new(const struct design *d, const struct model *m)
{
    struct plan *plan = mem_new(1, sizeof *plan);
    (void)m;
    plan->d = d;
    return plan;
}

void plan_free(struct plan *p)
{
    mem_free(p);
}

struct posterior *posterior_new(const struct plan *p)
{
    struct posterior *x = mem_new(1, sizeof *x);
    x->d = p->d;
    return x;
}

void posterior_free(struct posterior *p)
{
    mem_free(p->x);
    mem_free(p->second);
    mem_free(p);
}

enum status posterior_start(struct posterior *p, const struct level_data *data, struct rng_key key,
                            struct err *e)
{
    (void)data, (void)key, (void)e;
    p->slice = false;
    return STATUS_OK;
}

void posterior_extend(struct posterior *p, size_t total)
{
    if (script.calls < CALLS) {
        script.lengths[script.calls] = total;
        script.by_slice[script.calls++] = p->slice;
    }
    mem_free(p->x);
    p->x = normal_draws(total, 1, 0);
    p->total = total;
}

void posterior_use_slice(struct posterior *p)
{
    p->slice = true;
}

bool posterior_is_lost(const struct posterior *p)
{
    (void)p;
    return false;
}

bool posterior_is_slice(const struct posterior *p)
{
    return p->slice;
}

void posterior_simulated(struct posterior *p, size_t draws, bool *doubtful, bool *distrusted)
{
    posterior_extend(p, draws);
    *doubtful = script.doubtful;
    *distrusted = script.distrusted;
}

static struct draws rows_of(const double *x, size_t n, size_t chains)
{
    return (struct draws){.n = n,
                          .points = n,
                          .stride = n,
                          .chains = chains,
                          .levels = LEVELS,
                          .link = x,
                          .response = x};
}

struct draws posterior_draws(const struct posterior *p)
{
    return rows_of(p->x, p->total, CHAINS);
}

double posterior_kish(const struct posterior *p)
{
    return p->slice ? 1 : 0.9;
}

bool posterior_is_doubtful(const struct posterior *p)
{
    return script.doubtful && !p->slice;
}

void posterior_diagnose(const struct draws *d, int threads, struct convergence *out)
{
    const bool slice = script.by_slice[script.calls - 1];
    const size_t at = slice ? script.slice_converges_at : script.converges_at;
    (void)threads;
    out[0] = (struct convergence){NAN, NAN, NAN, NAN}; /* a fixed parameter's row */
    for (size_t k = 0; k < d->levels; k++) {
        const double n = (double)d->n;
        out[d->parameters + k] = (struct convergence){d->n >= at ? 1.001 : 1.02, n, n, 0.01};
    }
    out[d->parameters] = (struct convergence){NAN, NAN, NAN, NAN}; /* a constant level mean */
}

struct draws posterior_second(struct posterior *p, const char **name)
{
    mem_free(p->second);
    p->second = normal_draws(SECOND, 2, p->slice ? script.slice_shift : script.shift);
    *name = "quadrature";
    return rows_of(p->second, SECOND, 1);
}

struct draws posterior_prior(struct posterior *p, size_t count, struct rng_key key)
{
    (void)key;
    mem_free(p->x);
    p->x = normal_draws(count, 3, 0);
    p->total = count;
    return rows_of(p->x, count, 1);
}

bool posterior_curve_at(const struct plan *p, const struct draws *d, double x, double *out)
{
    (void)p, (void)d, (void)x, (void)out;
    return false;
}

/* Nor is there a likelihood fit. */
void likelihood_fit_run(struct likelihood_fit *out, const struct design *d, const struct model *m,
                        const struct level_data *data)
{
    (void)d, (void)m, (void)data;
    *out = (struct likelihood_fit){.exists = false};
}

void likelihood_fit_release(struct likelihood_fit *f)
{
    (void)f;
}

bool likelihood_fit_at(const struct likelihood_fit *f, const struct design *d,
                       const struct model *m, double x, double *response)
{
    (void)f, (void)d, (void)m, (void)x, (void)response;
    return false;
}

#endif
