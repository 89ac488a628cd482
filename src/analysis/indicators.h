/* SPDX-License-Identifier: GPL-3.0-or-later */
/* indicators.h: Monte Carlo standard errors of the shares of draws on which a level is, or meets, a
 * target, from the effective sample size of each share's own indicator.
 */
#ifndef TERRACE_INDICATORS_H
#define TERRACE_INDICATORS_H

#include "analysis/judge.h"

/* Fills ess_target, mcse_target, mcse_meets, ess_none, mcse_none of one target of a judgement whose
 * shares are counted. */
void indicator_errors(struct judgement *j, size_t target);

/* Standard errors of pr_target and pr_meets of one level. Of grouped draws those in the judgement
 * count points alone, which is never too small; here they come from the draws themselves. */
double indicator_target_error(const struct judgement *j, size_t target, size_t level);
double indicator_meets_error(const struct judgement *j, size_t target, size_t level);

#endif
