/* SPDX-License-Identifier: GPL-3.0-or-later */
/* indicators.c: effective sample sizes of the indicators of one target. */
#include "analysis/indicators.h"

#include "base/mem.h"
#include "posterior/diagnostics.h"

/* One target traced over the draws. Jobs: one a level for pr_target, one a level for pr_meets, and
 * one for none. */
struct trace {
    struct judgement *j;
    size_t target;
    double *bar; /* [draw] */
    int *level;  /* [draw] */
};

static void mark_draws(const struct judgement *j, const int *found, int level, double *mark)
{
    for (size_t i = 0; i < j->draws.n; i++)
        mark[i] = found[i] == level ? 1 : 0;
}

static void mark_level(const struct trace *x, int level, double *mark)
{
    mark_draws(x->j, x->level, level, mark);
}

static void mark_bars(const struct judgement *j, size_t target, const double *bar, size_t level,
                      double *mark)
{
    const double s = design_sign(j->d);
    const double *m = judge_row(j, level, j->d->target[target].link);
    for (size_t i = 0; i < j->draws.n; i++)
        mark[i] = s * m[i] >= bar[i] ? 1 : 0;
}

static void mark_meets(const struct trace *x, size_t level, double *mark)
{
    mark_bars(x->j, x->target, x->bar, level, mark);
}

/* A share of 0 or 1 has a constant indicator: every draw counts. */
static bool is_constant(double p)
{
    return p <= 0 || p >= 1;
}

static void job_none(const struct trace *x, double *mark)
{
    struct judgement *j = x->j;
    const double p = j->pr_none[x->target];
    double ess = (double)j->draws.n;
    if (!is_constant(p)) {
        mark_level(x, LEVEL_NONE, mark);
        ess = judge_ess(j, mark);
    }
    j->ess_none[x->target] = ess;
    j->mcse_none[x->target] = diag_mcse_probability(p, ess);
}

static void job_target(const struct trace *x, size_t level, double *mark)
{
    struct judgement *j = x->j;
    const size_t at = x->target * j->d->levels + level;
    double ess = (double)j->draws.n;
    if (!is_constant(j->pr_target[at])) {
        mark_level(x, (int)level, mark);
        ess = judge_ess(j, mark);
    }
    j->ess_target[at] = ess;
    j->mcse_target[at] = diag_mcse_probability(j->pr_target[at], ess);
}

static void job_meets(const struct trace *x, size_t level, double *mark)
{
    struct judgement *j = x->j;
    const size_t at = x->target * j->d->levels + level;
    double ess = (double)j->draws.n;
    if (!is_constant(j->pr_meets[at])) {
        mark_meets(x, level, mark);
        ess = judge_ess(j, mark);
    }
    j->mcse_meets[at] = diag_mcse_probability(j->pr_meets[at], ess);
}

static void run_job(const struct trace *x, size_t job)
{
    const size_t levels = x->j->d->levels;
    double *mark = mem_new(x->j->draws.n, sizeof *mark);
    if (job < levels)
        job_target(x, job, mark);
    else if (job < 2 * levels)
        job_meets(x, job - levels, mark);
    else
        job_none(x, mark);
    mem_free(mark);
}

/* Probabilities of the control and of closed levels are 0 by definition, without error. */
static bool is_idle(const struct trace *x, size_t job)
{
    const size_t levels = x->j->d->levels;
    const size_t level = job < levels ? job : job - levels;
    return job < 2 * levels && (!x->j->open[level] || !design_is_active(x->j->d, level));
}

static void clear_job(const struct trace *x, size_t job)
{
    struct judgement *j = x->j;
    const size_t levels = j->d->levels, at = x->target * levels + job % levels;
    if (job < levels) {
        j->ess_target[at] = (double)j->draws.n;
        j->mcse_target[at] = 0;
    } else {
        j->mcse_meets[at] = 0;
    }
}

void indicator_errors(struct judgement *j, size_t target)
{
    struct trace x = {j, target, NULL, NULL};
    const size_t jobs = 2 * j->d->levels + 1;
    x.bar = mem_new(j->draws.n, sizeof *x.bar);
    x.level = mem_new(j->draws.n, sizeof *x.level);
    tally_trace(j->tally, &j->draws, j->open, target, x.bar, x.level);
#pragma omp parallel for schedule(dynamic) num_threads(j->threads)
    for (size_t job = 0; job < jobs; job++)
        if (is_idle(&x, job))
            clear_job(&x, job);
        else
            run_job(&x, job);
    mem_free(x.bar);
    mem_free(x.level);
}

double indicator_target_error(const struct judgement *j, size_t target, size_t level)
{
    const size_t at = target * j->d->levels + level;
    if (!judge_is_grouped(j))
        return j->mcse_target[at];
    tally_trace(j->tally, &j->draws, j->open, target, j->bar, j->found);
    mark_draws(j, j->found, (int)level, j->work);
    return judge_mcse_share(j, j->work, j->pr_target[at]);
}

double indicator_meets_error(const struct judgement *j, size_t target, size_t level)
{
    const size_t at = target * j->d->levels + level;
    if (!judge_is_grouped(j))
        return j->mcse_meets[at];
    tally_trace(j->tally, &j->draws, j->open, target, j->bar, j->found);
    mark_bars(j, target, j->bar, level, j->work);
    return judge_mcse_share(j, j->work, j->pr_meets[at]);
}
