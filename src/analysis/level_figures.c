/* SPDX-License-Identifier: GPL-3.0-or-later */
/* level_figures.c: means, sds and quantiles by level and by parameter. */
#include "analysis/level_figures.h"

#include <math.h>

#include "base/mem.h"
#include "posterior/diagnostics.h"

static const struct spread no_spread = {NAN, NAN, NAN, NAN, NAN};

/* ---- probabilities ---- */

static void copy_probabilities(struct analysis *out, const struct judgement *j)
{
    for (size_t k = 0; k < j->d->levels; k++) {
        struct level_result *x = &out->level[k];
        x->open = j->open[k];
        for (size_t t = 0; t < j->d->targets; t++) {
            const size_t at = t * j->d->levels + k;
            x->pr_target[t] = j->pr_target[at];
            x->pr_meets[t] = j->pr_meets[at];
            x->mcse_target[t] = j->mcse_target[at];
            x->mcse_meets[t] = j->mcse_meets[at];
        }
    }
}

/* The largest Monte Carlo standard error among a target's probabilities. */
static double worst_error(const struct judgement *j, size_t t)
{
    double worst = j->mcse_none[t];
    for (size_t at = t * j->d->levels; at < (t + 1) * j->d->levels; at++)
        worst = fmax(worst, fmax(j->mcse_target[at], j->mcse_meets[at]));
    return worst;
}

static void copy_targets(struct analysis *out, const struct judgement *j)
{
    for (size_t t = 0; t < j->d->targets; t++) {
        struct target_result *x = &out->target[t];
        const size_t at = t * j->d->levels + (size_t)(j->selected[t] < 0 ? 0 : j->selected[t]);
        x->selected = j->selected[t];
        x->pr_none = j->pr_none[t];
        x->pr_selected = x->selected < 0 ? 0 : j->pr_target[at];
        x->mcse = x->selected < 0 ? j->mcse_none[t] : j->mcse_target[at];
        x->close = j->close[t];
        x->imprecise = worst_error(j, t) > j->d->precision;
    }
}

/* ---- spreads ---- */

static struct spread spread_of(const double *x, size_t n)
{
    static const double q[3] = {0.025, 0.5, 0.975};
    struct spread s;
    double out[3];
    s.mean = diag_mean(x, n);
    s.sd = diag_sd(x, n, s.mean);
    diag_quantiles(x, n, 3, q, out);
    s.q025 = out[0];
    s.q50 = out[1];
    s.q975 = out[2];
    return s;
}

static struct spread gain_spread(const struct judgement *j, size_t level)
{
    const struct design *d = j->d;
    const size_t n = j->draws.n;
    const double s = design_sign(d), number = d->reference_number;
    const double *m = judge_row(j, level, false);
    const double *m0 =
        d->reference_level >= 0 ? judge_row(j, (size_t)d->reference_level, false) : NULL;
    double *gain = mem_new(n, sizeof *gain);
    for (size_t i = 0; i < n; i++)
        gain[i] = s * (m[i] - (m0 ? m0[i] : number));
    const struct spread out = spread_of(gain, n);
    mem_free(gain);
    return out;
}

static void full_level(struct analysis *out, const struct judgement *j, size_t k)
{
    struct level_result *x = &out->level[k];
    const bool self = (int)k == j->d->reference_level;
    x->response = spread_of(judge_row(j, k, false), j->draws.n);
    x->pr_positive = j->pr_positive[k];
    if (!design_has_gain(j->d))
        x->gain = no_spread;
    else
        x->gain = self ? (struct spread){0, 0, 0, 0, 0} : gain_spread(j, k);
}

void figures_full(struct analysis *out, const struct judgement *j)
{
    copy_probabilities(out, j);
    copy_targets(out, j);
#pragma omp parallel for schedule(dynamic) num_threads(j->threads)
    for (size_t k = 0; k < j->d->levels; k++)
        full_level(out, j, k);
}

/* Mean and sd in one pass over eight partial sums about the first value: fast, and the same on
 * every machine. */
static void quick_moments(const double *x, size_t n, double *mean, double *sd)
{
    enum { LANES = 8 };
    double sum[LANES] = {0}, square[LANES] = {0}, total = 0, squares = 0;
    const double pivot = x[0];
    for (size_t i = 0; i + LANES <= n; i += LANES)
        for (size_t l = 0; l < LANES; l++) {
            const double u = x[i + l] - pivot;
            sum[l] += u;
            square[l] += u * u;
        }
    for (size_t l = 0; l < LANES; l++) {
        total += sum[l];
        squares += square[l];
    }
    for (size_t i = n - n % LANES; i < n; i++) {
        total += x[i] - pivot;
        squares += (x[i] - pivot) * (x[i] - pivot);
    }
    const double count = (double)n, variance = (squares - total * (total / count)) / (count - 1);
    *mean = pivot + total / count;
    *sd = variance > 0 ? sqrt(variance) : 0;
}

void figures_short(struct analysis *out, const struct judgement *j)
{
    const struct design *d = j->d;
    const bool gains = design_has_gain(d);
    copy_probabilities(out, j);
    copy_targets(out, j);
    for (size_t k = 0; k < d->levels; k++) {
        struct level_result *x = &out->level[k];
        x->response = x->gain = no_spread;
        quick_moments(judge_row(j, k, false), j->draws.n, &x->response.mean, &x->response.sd);
        x->pr_positive = NAN;
    }
    for (size_t k = 0; k < d->levels && gains; k++) {
        const double reference = d->reference_level >= 0
                                     ? out->level[d->reference_level].response.mean
                                     : d->reference_number;
        out->level[k].gain.mean = design_sign(d) * (out->level[k].response.mean - reference);
    }
}

/* ---- parameters ---- */

static double over_prior(double sd, const struct prior *p)
{
    const double before = prior_is_fixed(p) ? NAN : prior_sd(p);
    return before > 0 && isfinite(before) ? sd / before : NAN;
}

void figures_parameters(struct analysis *out, const struct judgement *j,
                        const struct convergence *diagnosed)
{
    const struct model *m = &j->d->model;
#pragma omp parallel for schedule(dynamic) num_threads(j->threads)
    for (size_t i = 0; i < m->parameters; i++) {
        struct parameter_result *x = &out->parameter[i];
        x->name = m->parameter[i]->name;
        x->value = spread_of(j->draws.parameter + i * j->draws.stride, j->draws.n);
        x->diag = diagnosed[i];
        x->sd_over_prior_sd = over_prior(x->value.sd, &m->prior[i]);
    }
}
