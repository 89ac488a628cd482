/* SPDX-License-Identifier: GPL-3.0-or-later */
/* tally.h: on which draws a level is, or meets, each target: counting, block by block.
 *
 * Draws are read in tiles that stay in the first-level cache. Counts are whole numbers, so they do
 * not depend on order. No allocation after tally_new. One tally a thread.
 */
#ifndef TERRACE_TALLY_H
#define TERRACE_TALLY_H

#include <stdbool.h>
#include <stddef.h>

#include "design/design.h"
#include "posterior/posterior.h"

struct tally;

struct tally *tally_new(const struct design *d);
void tally_free(struct tally *w);

/* Shares of the draws. pr_target, pr_meets: [target * levels + level], 0 for the control and for
 * levels that are not open; pr_none: [target]. `open` has one entry a level; the control is open.
 */
void tally_count(struct tally *w, const struct draws *draws, const bool *open, double *pr_target,
                 double *pr_meets, double *pr_none);

/* One target, draw by draw: its bar, and the draw's target level (LEVEL_NONE: none). */
void tally_trace(struct tally *w, const struct draws *draws, const bool *open, size_t target,
                 double *bar, int *level);

/* The largest s m over the open active levels, draw by draw, on the link or response scale. */
void tally_best(struct tally *w, const struct draws *draws, const bool *open, bool link,
                double *best);

#endif
