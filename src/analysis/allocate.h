/* SPDX-License-Identifier: GPL-3.0-or-later */
/* allocate.h: the shares with which the next subjects are randomized (interface, section 5).
 *
 * Pure functions; shares sum to 1 over the open levels, closed ones get 0. */
#ifndef TERRACE_ALLOCATE_H
#define TERRACE_ALLOCATE_H

#include <stdbool.h>
#include <stddef.h>

#include "design/design.h"

struct share_inputs {
    const struct design *d;
    const bool *open;        /* [level] */
    const double *pr_target; /* [level], of the allocation target */
    double pr_none;
    const double *variance;   /* [level], posterior, on the target's scale */
    const double *randomized; /* [level] */
    double n;                 /* all randomized, for power n/2N */
};

/* What has to be said of the shares. */
struct share_remarks {
    bool all_zero;  /* all weights were 0: equal shares */
    bool no_bounds; /* the bounds cannot be met by the levels not dropped: equal shares */
    bool filled_up; /* the levels with weight are at at_most: the others share what is missing */
};

/* share: [level]. */
void allocate_adapted(double *share, struct share_remarks *remarks, const struct share_inputs *in);

/* The fixed ratio over the open levels. */
void allocate_fixed(double *share, const struct design *d, const bool *open);

#endif
