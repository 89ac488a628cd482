/* SPDX-License-Identifier: GPL-3.0-or-later */
/* plan.h: a model made ready for fits; shared by the rooms of this floor. */
#ifndef TERRACE_PLAN_H
#define TERRACE_PLAN_H

#include "design/data.h"
#include "posterior/problem.h"
#include "posterior/proposal.h"

struct plan {
    const struct design *d;
    const struct model *m;
    struct problem problem; /* without data */
    double value[LEVELS_MAX], carry[LEVELS_MAX], gap[LEVELS_MAX];
    size_t order[LEVELS_MAX];
    struct coordinate_range range;
    bool sd_vanishes; /* the prior on sd vanishes at 0 */
    bool moments;     /* some result averages exact conditional probabilities */
};

/* The problem of one fit: the plan's with data; y needs room for the levels. */
void plan_problem(struct problem *out, const struct plan *plan, const struct level_data *data,
                  double *y);

#endif
