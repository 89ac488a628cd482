/* SPDX-License-Identifier: GPL-3.0-or-later */
/* level_figures.h: means, sds and quantiles by level and by parameter, from judged draws.
 *
 * Fill out->level, out->target and out->parameter of an initialised analysis; next_share stays. */
#ifndef TERRACE_LEVEL_FIGURES_H
#define TERRACE_LEVEL_FIGURES_H

#include "analysis/analysis.h"
#include "analysis/judge.h"

/* What a simulated trial needs: probabilities, mean and sd of the response, mean of the gain. The
 * rest is NaN. */
void figures_short(struct analysis *out, const struct judgement *j);

/* Everything about levels and targets. */
void figures_full(struct analysis *out, const struct judgement *j);

/* Parameters with their diagnostics (one row a parameter). */
void figures_parameters(struct analysis *out, const struct judgement *j,
                        const struct convergence *diagnosed);

#endif
