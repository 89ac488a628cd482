/* SPDX-License-Identifier: GPL-3.0-or-later */
/* live_run.c: the live fit: lengths until everything is settled, a second method, trust. */
#include "analysis/live_run.h"

#include <math.h>
#include <string.h>

#include "analysis/agreement.h"
#include "analysis/cautions.h"
#include "analysis/decide.h"
#include "analysis/figure_walk.h"
#include "analysis/measures.h"

enum { FIRST_LENGTH = 8000 };

static const double RHAT_MOST = 1.01, ESS_LEAST = 400;

size_t live_first_length(const struct design *d)
{
    return d->max_draws < FIRST_LENGTH ? (size_t)d->max_draws : FIRST_LENGTH;
}

size_t live_next_length(size_t length, const struct design *d)
{
    const size_t most = (size_t)d->max_draws;
    return 2 * length < most ? 2 * length : most;
}

/* ---- convergence ---- */

static double least(double a, double b)
{
    return b < a || isnan(a) ? b : a;
}

static double most(double a, double b)
{
    return b > a || isnan(a) ? b : a;
}

/* Constant quantities are NaN and drop out of every comparison. */
static bool note_convergence(struct live_run *x, const struct draws *draws)
{
    struct analysis_diagnostics *g = &x->out->diagnostics;
    posterior_diagnose(draws, x->r->threads, x->diagnosed);
    g->chains = draws->chains;
    g->draws = draws->n;
    g->max_rhat = g->min_ess_bulk = g->min_ess_tail = NAN;
    for (size_t i = 0; i < draws->parameters + draws->levels; i++) {
        const struct convergence *c = &x->diagnosed[i];
        g->max_rhat = most(g->max_rhat, c->rhat);
        g->min_ess_bulk = least(g->min_ess_bulk, c->ess_bulk);
        g->min_ess_tail = least(g->min_ess_tail, c->ess_tail);
    }
    return !posterior_is_lost(x->p) &&
           !(g->max_rhat > RHAT_MOST || g->min_ess_bulk < ESS_LEAST || g->min_ess_tail < ESS_LEAST);
}

/* ---- judging ---- */

static void judge_first(struct live_run *x, const struct draws *draws)
{
    x->j->by_ess = true;
    x->j->threads = x->r->threads;
    judge_counts(x->j, draws);
    judge_selection(x->j);
    measure_gains(x->j);
    if (figures_are_middles(x->j->d))
        judge_middles(x->j, NULL);
    decide(x->out, x->j, x->r);
}

/* Independent draws need no effective sample sizes. */
static void judge_second(struct live_run *x, const struct draws *draws)
{
    struct judgement *j = x->second;
    j->by_ess = draws->chains > 1;
    j->share = 1;
    j->threads = x->r->threads;
    judge_counts(j, draws);
    memcpy(j->selected, x->j->selected, x->j->d->targets * sizeof *j->selected);
    measure_gains(j);
    if (figures_are_middles(j->d))
        judge_middles(j, x->j);
    decide(x->other, j, x->r);
}

static bool is_precise(const struct live_run *x)
{
    for (size_t i = 0; i < figure_count_all(x->j->d); i++)
        if (figure_at(x->j, x->out, i).mcse > x->j->d->precision)
            return false;
    return true;
}

static bool is_settled(const struct live_run *x)
{
    for (size_t i = 0; i < figure_count_all(x->j->d); i++)
        if (figure_at(x->j, x->out, i).close)
            return false;
    return is_precise(x);
}

/* ---- the run ---- */

/* All lengths of one sampler, as far as needed; whether it converged. Proposals that turn out
 * doubtful at the first length end it there. */
static bool run_lengths(struct live_run *x)
{
    const struct design *d = x->j->d;
    for (size_t length = live_first_length(d);; length = live_next_length(length, d)) {
        const bool final_length = length >= (size_t)d->max_draws;
        posterior_extend(x->p, length);
        if (length == live_first_length(d) && !posterior_is_slice(x->p) &&
            posterior_is_doubtful(x->p))
            return false;
        const struct draws draws = posterior_draws(x->p);
        const bool converged = note_convergence(x, &draws);
        if (converged || final_length)
            judge_first(x, &draws);
        if (final_length || (converged && is_settled(x)))
            return converged;
    }
}

static bool run_slice(struct live_run *x)
{
    posterior_use_slice(x->p);
    x->out->diagnostics.slice = true;
    return run_lengths(x);
}

static struct agreement compare(struct live_run *x)
{
    struct analysis_diagnostics *g = &x->out->diagnostics;
    const struct draws draws = posterior_second(x->p, &g->second_name);
    judge_second(x, &draws);
    const struct agreement found = agreement_of(x->j, x->out, x->second, x->other);
    g->second_difference = found.difference;
    return found;
}

/* Warnings about what was settled at the last length, and what was not. */
static void warn(struct live_run *x, bool converged, const struct agreement *found, double kish)
{
    struct analysis_diagnostics *g = &x->out->diagnostics;
    if (g->slice)
        caution_slice(x->out, kish);
    if (!converged)
        caution_convergence(x->out);
    if (!found->holds)
        caution_agreement(x->out, x->j, x->other, x->second, found);
    g->imprecise = !is_precise(x);
    caution_precision(x->out, x->j);
    caution_close(x->out, x->j);
}

void live_run(struct live_run *x)
{
    struct analysis_diagnostics *g = &x->out->diagnostics;
    bool converged = run_lengths(x);
    const double kish = posterior_kish(x->p);
    if (!converged)
        converged = run_slice(x);
    struct agreement found = compare(x);
    if (converged && !found.holds && !g->slice) {
        converged = run_slice(x);
        found = compare(x);
    }
    g->kish = kish;
    g->trusted = converged && found.holds;
    warn(x, converged, &found, kish);
}
