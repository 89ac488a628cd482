/* SPDX-License-Identifier: GPL-3.0-or-later */
/* analysis.c: one analysis of the data at a cut: fit, judge, decide, allocate. */
#include "analysis/analysis.h"

#include <math.h>

#include "analysis/allocate.h"
#include "analysis/cautions.h"
#include "analysis/decide.h"
#include "analysis/judge.h"
#include "analysis/lack_of_fit.h"
#include "analysis/level_figures.h"
#include "analysis/likelihood_beside.h"
#include "analysis/live_run.h"
#include "analysis/mean_curve.h"
#include "analysis/measures.h"
#include "analysis/sensitivity.h"
#include "analysis/targets.h"
#include "base/mem.h"
#include "posterior/diagnostics.h"

enum { PRIOR_DRAWS = 65536 };

struct analyst {
    const struct design *d;
    struct plan *plan;
    struct posterior *p;
    struct judgement *j, *second;  /* second: live analyses only, else NULL */
    struct analysis other;         /* with second */
    struct convergence *diagnosed; /* [parameters + levels] */
    struct draws draws;            /* behind the last run */
};

/* ---- words ---- */

static const struct {
    const char *key, *sentence;
} words[] = {
    [RECOMMEND_CONTINUE] = {"continue", "Continue the trial with the next shares."},
    [RECOMMEND_STOP_SUCCESS] = {"stop_success", "Stop enrolment: the trial has succeeded."},
    [RECOMMEND_STOP_FUTILITY] = {"stop_futility",
                                 "Stop enrolment: success has become too improbable."},
    [RECOMMEND_SUCCESS] = {"success", "The trial has succeeded."},
    [RECOMMEND_NO_SUCCESS] = {"no_success", "The trial has not succeeded."},
    [RECOMMEND_COMPLETE] = {"complete",
                            "The trial is complete; its design names no final criterion."},
    [RECOMMEND_UNDETERMINED] = {"undetermined",
                                "The computation cannot be trusted: no recommendation."},
};

const char *recommendation_key(enum recommendation r)
{
    return words[r].key;
}

const char *recommendation_sentence(enum recommendation r)
{
    return words[r].sentence;
}

int analysis_true_level(const struct design *d, size_t target, const double *response)
{
    return target_true_level(d, &d->target[target], response);
}

bool parameter_set_by_prior(const struct parameter_result *x)
{
    return x->sd_over_prior_sd > 0.9;
}

/* ---- life cycle of an analysis ---- */

static void level_init(struct level_result *x, size_t targets)
{
    double **arrays[] = {&x->pr_target, &x->pr_meets, &x->mcse_target, &x->mcse_meets};
    for (size_t i = 0; i < sizeof arrays / sizeof *arrays; i++)
        *arrays[i] = mem_new(targets, sizeof(double));
    x->next_share = NAN;
}

void analysis_init(struct analysis *a, const struct design *d)
{
    *a = (struct analysis){.levels = d->levels,
                           .targets = d->targets,
                           .parameters = d->model.parameters,
                           .decisions = d->decisions,
                           .model = &d->model};
    a->level = mem_new(d->levels, sizeof *a->level);
    a->target = mem_new(d->targets, sizeof *a->target);
    a->parameter = mem_new(a->parameters, sizeof *a->parameter);
    a->decision = mem_new(d->decisions, sizeof *a->decision);
    for (size_t k = 0; k < d->levels; k++)
        level_init(&a->level[k], d->targets);
    for (size_t i = 0; i < d->decisions; i++)
        a->decision[i].condition =
            mem_new(d->decision[i].when.count, sizeof *a->decision->condition);
    if (d->has_final)
        a->final_success.condition =
            mem_new(d->final_success.count, sizeof *a->final_success.condition);
}

static void level_release(struct level_result *x)
{
    mem_free(x->pr_target);
    mem_free(x->pr_meets);
    mem_free(x->mcse_target);
    mem_free(x->mcse_meets);
    mem_free(x->prior_pr_target);
}

void analysis_release(struct analysis *a)
{
    for (size_t k = 0; a->level && k < a->levels; k++)
        level_release(&a->level[k]);
    for (size_t i = 0; a->decision && i < a->decisions; i++)
        mem_free(a->decision[i].condition);
    mem_free(a->final_success.condition);
    mem_free(a->level);
    mem_free(a->target);
    mem_free(a->parameter);
    mem_free(a->decision);
    mean_curve_release(&a->curve);
    caution_release(a);
    sensitivity_release(a);
    likelihood_fit_release(&a->likelihood);
    mem_free(a->failure);
    *a = (struct analysis){0};
}

/* ---- workspace ---- */

struct analyst *analyst_new(const struct design *d)
{
    struct analyst *w = mem_new(1, sizeof *w);
    w->d = d;
    w->plan = plan_new(d, &d->model);
    w->p = posterior_new(w->plan);
    w->j = judgement_new(d);
    w->diagnosed = mem_new(d->model.parameters + d->levels, sizeof *w->diagnosed);
    return w;
}

void analyst_free(struct analyst *w)
{
    if (!w)
        return;
    posterior_free(w->p);
    plan_free(w->plan);
    judgement_free(w->j);
    if (w->second) {
        judgement_free(w->second);
        analysis_release(&w->other);
    }
    mem_free(w->diagnosed);
    mem_free(w);
}

struct draws analyst_draws(const struct analyst *w)
{
    return w->draws;
}

/* ---- one analysis ---- */

static bool any_level_open(const struct judgement *j)
{
    for (size_t k = 0; k < j->d->levels; k++)
        if (j->open[k] && design_is_active(j->d, k))
            return true;
    return false;
}

/* Posterior variances on the scale of the allocation target. */
static void level_variances(double *variance, const struct analysis *a, const struct judgement *j,
                            bool link)
{
    for (size_t k = 0; k < a->levels; k++) {
        double sd = a->level[k].response.sd;
        if (link) {
            const double *x = judge_row(j, k, true);
            sd = diag_sd(x, j->draws.n, diag_mean(x, j->draws.n));
        }
        variance[k] = sd * sd;
    }
}

static void adapted_shares(double *share, struct analysis *a, const struct judgement *j,
                           const struct level_data *data, double randomized)
{
    const size_t t = (size_t)j->d->allocation.adapt_target;
    double variance[LEVELS_MAX];
    struct share_remarks remarks;
    level_variances(variance, a, j, j->d->target[t].link);
    const struct share_inputs in = {.d = j->d,
                                    .open = j->open,
                                    .pr_target = j->pr_target + t * j->d->levels,
                                    .pr_none = j->pr_none[t],
                                    .variance = variance,
                                    .randomized = data->randomized,
                                    .n = randomized};
    allocate_adapted(share, &remarks, &in);
    note_shares(a, &remarks);
}

/* Distrusted: the shares in force stay; the last analysis has no next subject. */
static void fill_shares(struct analysis *a, const struct judgement *j,
                        const struct level_data *data, const struct analysis_request *r)
{
    double share[LEVELS_MAX];
    const bool none = r->final || !a->diagnostics.trusted;
    if (none)
        for (size_t k = 0; k < a->levels; k++)
            share[k] = NAN;
    else if (j->d->allocation.adapts && r->adapted)
        adapted_shares(share, a, j, data, r->randomized);
    else
        allocate_fixed(share, j->d, j->open);
    for (size_t k = 0; k < a->levels; k++)
        a->level[k].next_share = share[k];
}

static struct rng_key key_of(const struct analysis_request *r)
{
    return (struct rng_key){r->seed, RNG_SAMPLER, r->scenario, r->trial, (uint32_t)r->number};
}

static void run_live(struct analysis *out, struct analyst *w, const struct level_data *data,
                     const struct analysis_request *r)
{
    if (!w->second) {
        w->second = judgement_new(w->d);
        analysis_init(&w->other, w->d);
    }
    judgement_open(w->second, r->closed);
    struct live_run x = {w->p, w->j, w->second, out, &w->other, w->diagnosed, r};
    caution_data(out, w->d, data);
    live_run(&x);
    figures_full(out, w->j);
    figures_parameters(out, w->j, w->diagnosed);
    out->diagnostics.lack_of_fit_p = lack_of_fit_p(w->d, data, &w->j->draws, key_of(r));
    caution_fit(out);
    caution_set_by_prior(out, data);
    mean_curve_fill(&out->curve, w->plan, w->d, &w->j->draws, r->threads);
    likelihood_beside(out, w->d, data);
}

static void no_parameters(struct analysis *out, const struct design *d)
{
    for (size_t i = 0; i < out->parameters; i++)
        out->parameter[i] = (struct parameter_result){
            d->model.parameter[i]->name, {NAN, NAN, NAN, NAN, NAN}, {NAN, NAN, NAN, NAN}, NAN};
}

static void run_simulated(struct analysis *out, struct analyst *w, const struct analysis_request *r)
{
    struct analysis_diagnostics *g = &out->diagnostics;
    bool doubtful, distrusted;
    posterior_simulated(w->p, (size_t)w->d->draws, &doubtful, &distrusted);
    const struct draws draws = posterior_draws(w->p);
    g->chains = draws.chains;
    g->draws = draws.n;
    g->kish = posterior_kish(w->p);
    g->slice = posterior_is_slice(w->p);
    g->trusted = !distrusted;
    g->max_rhat = g->min_ess_bulk = g->min_ess_tail = NAN;
    w->j->by_ess = false;
    w->j->share = g->kish;
    judge_counts(w->j, &draws);
    judge_selection(w->j);
    decide(out, w->j, r);
    figures_short(out, w->j);
    no_parameters(out, w->d);
}

static void clear(struct analysis *out, const struct analysis_request *r)
{
    caution_release(out);
    mean_curve_release(&out->curve);
    sensitivity_release(out);
    likelihood_fit_release(&out->likelihood);
    out->number = r->number;
    out->final = r->final;
    out->diagnostics =
        (struct analysis_diagnostics){.second_difference = NAN, .lack_of_fit_p = NAN};
}

enum status analysis_run(struct analysis *out, struct analyst *w, const struct level_data *data,
                         const struct analysis_request *r, struct err *e)
{
    clear(out, r);
    judgement_open(w->j, r->closed);
    if (!any_level_open(w->j))
        return err_add(e, STATUS_INPUT, w->d->file, 0, "/levels/list",
                       "no active level is open; at least one must stay open");
    const enum status status = posterior_start(w->p, data, key_of(r), e);
    if (status != STATUS_OK)
        return status;
    if (r->live)
        run_live(out, w, data, r);
    else
        run_simulated(out, w, r);
    w->draws = w->j->draws;
    fill_shares(out, w->j, data, r);
    if (r->live)
        sensitivity_run(out, w->d, data, r);
    if (out->diagnostics.trusted)
        return STATUS_OK;
    out->recommendation = RECOMMEND_UNDETERMINED;
    return STATUS_DISTRUSTED;
}

void analysis_prior(struct analysis *out, struct analyst *w, const struct design *d)
{
    const struct rng_key key = {d->seed, RNG_PRIOR, 0, 0, 0};
    const struct analysis_request r = {.number = 0, .threads = 1};
    clear(out, &r);
    judgement_open(w->j, NULL);
    w->draws = posterior_prior(w->p, PRIOR_DRAWS, key);
    w->j->by_ess = false;
    w->j->share = 1;
    w->j->threads = 1;
    judge_counts(w->j, &w->draws);
    judge_selection(w->j);
    measure_gains(w->j);
    figures_full(out, w->j);
}
