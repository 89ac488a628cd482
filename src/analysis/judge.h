/* SPDX-License-Identifier: GPL-3.0-or-later */
/* judge.h: what a set of posterior draws says of every target, with Monte Carlo standard errors.
 *
 * Life cycle: judgement_new once per design, judge_counts per set of draws (measures.h then
 * reads the judgement). With `by_ess` every standard error uses the effective
 * sample size of what was counted (live analyses); else `share` x draws stands for all of them.
 */
#ifndef TERRACE_JUDGE_H
#define TERRACE_JUDGE_H

#include <stdbool.h>
#include <stddef.h>

#include "analysis/tally.h"
#include "design/design.h"
#include "posterior/posterior.h"

/* Figures with two indices stand at [target * levels + level]. */
struct judgement {
    const struct design *d;
    struct draws draws; /* borrowed: those judged last */
    bool *open;         /* owned; by level; the control is always open */
    bool by_ess;
    double share; /* without by_ess: effective draws per draw (Kish) */
    int threads;  /* for by_ess; results never depend on it */

    double *pr_target, *pr_meets, *mcse_target, *mcse_meets; /* owned */
    double *ess_target;                                      /* owned */
    double *pr_none, *mcse_none, *ess_none;                  /* owned; [target] */
    int *selected;                                           /* owned; [target] */
    bool *close;                                             /* owned; [target] */
    double *pr_positive, *mcse_positive; /* owned; [level]; filled by measure_gains */
    /* owned; [level]; filled by judge_middles: Pr(response above `middle`), where nothing else is
     * asked of the draws */
    double *middle, *pr_above, *mcse_above;

    struct tally *tally;
    double *work; /* one value a draw, for measures */
    double *bar;  /* one value a draw each: a target's trace of grouped draws */
    int *found;
    size_t room; /* draws that fit into work */
    int *level;  /* evaluations note here the level they looked at, or LEVEL_NONE */
};

struct judgement *judgement_new(const struct design *d);
void judgement_free(struct judgement *j);

/* Which levels are open: `closed` as in analysis_request (may be NULL). */
void judgement_open(struct judgement *j, const bool *closed);

/* pr_target, pr_meets, pr_none with their errors, on these draws. by_ess, share, threads and open
 * are set before. */
void judge_counts(struct judgement *j, const struct draws *draws);
/* `selected` and `close`, from the counts. */
void judge_selection(struct judgement *j);

/* Pr(response above a number in its middle): the posterior means of these draws, or those of
 * `other`. */
void judge_middles(struct judgement *j, const struct judgement *other);

/* Effective draws behind an average over the draws of x (by_ess or not). */
double judge_ess(const struct judgement *j, const double *x);
/* Grouped draws (posterior.h): several share a point. */
bool judge_is_grouped(const struct judgement *j);

/* Monte Carlo standard error of a share p of draws, x the indicator; of an average of x[n], one
 * value a draw or (grouped draws) a point. */
double judge_mcse_share(const struct judgement *j, const double *x, double p);
double judge_mcse_mean(const struct judgement *j, const double *x, size_t n, double mean);

/* Response (link or response scale) of a level, one value a draw. */
const double *judge_row(const struct judgement *j, size_t level, bool link);

#endif
