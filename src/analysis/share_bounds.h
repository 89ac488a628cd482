/* SPDX-License-Identifier: GPL-3.0-or-later */
/* share_bounds.h: shares kept between a least and a largest share each. */
#ifndef TERRACE_SHARE_BOUNDS_H
#define TERRACE_SHARE_BOUNDS_H

#include <stddef.h>

enum bounds_outcome {
    BOUNDS_KEPT,      /* min(most, max(least, lambda a)) with one lambda > 0, sum 1 */
    BOUNDS_FILLED_UP, /* those with a > 0 are at their most; the others share what is missing */
    BOUNDS_EQUAL      /* no shares within the bounds sum to 1: all equal */
};

/* a: n shares (1 to LEVELS_MAX), >= 0, not all 0, changed in place to sum 1; 0 <= least <= most
 * <= 1. Pure. */
enum bounds_outcome share_bounds(size_t n, double *a, const double *least, const double *most);

#endif
