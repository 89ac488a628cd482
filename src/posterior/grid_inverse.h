/* SPDX-License-Identifier: GPL-3.0-or-later */
/* grid_inverse.h: points of the proposal's grid by inversion: smooth in the uniforms, so that a
 * lattice of uniforms stays a lattice.
 *
 * The density is linear between neighbouring nodes; first the marginal of the first coordinate is
 * inverted, then the second's conditional.
 */
#ifndef TERRACE_GRID_INVERSE_H
#define TERRACE_GRID_INVERSE_H

#include "posterior/proposal.h"

struct grid_inverse {
    double marginal[NODES_ONE + 2];   /* density at the nodes of the first coordinate and beyond */
    double cumulative[NODES_ONE + 1]; /* of its segments; the last is their sum */
    double row[NODES_FIRST + 2]
              [NODES_SECOND + 1]; /* the same of the second, in each row of nodes */
};

/* dims 1 or 2. */
void grid_inverse_fill(struct grid_inverse *g, const struct proposal *q);

/* coord[dim][i] for the uniforms u[dim][i], i < n; distributed as the interpolated density. */
void grid_inverse_place(const struct grid_inverse *g, const struct proposal *q, size_t n,
                        double *const u[SHAPES_MAX], double *const coord[SHAPES_MAX]);

#endif
