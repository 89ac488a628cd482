/* SPDX-License-Identifier: GPL-3.0-or-later */
/* figure_walk.h: every probability and measure of an analysis in one fixed order, so that
 * precision, closeness and the agreement of two methods are asked of all of them alike.
 */
#ifndef TERRACE_FIGURE_WALK_H
#define TERRACE_FIGURE_WALK_H

#include <stdbool.h>
#include <stddef.h>

#include "analysis/analysis.h"
#include "analysis/judge.h"
#include "base/text.h"

enum figure_kind {
    FIGURE_TARGET,
    FIGURE_MEETS,
    FIGURE_NONE,
    FIGURE_POSITIVE,
    FIGURE_MEASURE,
    FIGURE_MIDDLE
};

struct walked_figure {
    enum figure_kind kind;
    double value, mcse;
    size_t target, level;              /* where the kind has one */
    const struct condition *condition; /* FIGURE_MEASURE, else NULL */
    bool close;                        /* FIGURE_MEASURE: within 3 mcse of its threshold */
};

/* Whether a design asks for no probability at all (a fit): the figures are then Pr(response above
 * its middle), by level (judge_middles). */
bool figures_are_middles(const struct design *d);
/* How many figures a design has (open levels or not), and the i-th of them. Those of closed levels
 * and of the control that are 0 by definition have mcse 0; without gains pr_positive is not
 * there. `a` holds the conditions evaluated on `j`. */
size_t figure_count_all(const struct design *d);
struct walked_figure figure_at(const struct judgement *j, const struct analysis *a, size_t i);

/* "the probability that 20 mg is ED90" */
void figure_name(struct text *out, const struct design *d, const struct walked_figure *f);

#endif
