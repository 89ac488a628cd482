/* SPDX-License-Identifier: GPL-3.0-or-later */
/* proposal.h: the proposal distribution of the independence sampler, built anew for every fit.
 *
 * A grid over the shape coordinates around the posterior's mass; between nodes the density is the
 * (bi)linear interpolation of node weights, because a node is picked by weight and moved by a tent
 * (the sum of two uniforms). v = ln sd follows a logistic whose mode and scale are interpolated
 * over the grid. Tierney 1994, Annals of Statistics 22:1701 (independence chains).
 */
#ifndef TERRACE_PROPOSAL_H
#define TERRACE_PROPOSAL_H

#include <stdbool.h>
#include <stddef.h>

#include "posterior/density.h"
#include "posterior/problem.h"

enum {
    NODES_ONE = 16,   /* nodes in one dimension */
    NODES_FIRST = 12, /* nodes of the first and second of two */
    NODES_SECOND = 8,
    NODES_MAX = NODES_FIRST * NODES_SECOND,
    CELLS_MAX = (NODES_FIRST + 2) * (NODES_SECOND + 2),
    GUIDE = 1024
};

/* One node, with a border of weight 0 around the grid. */
struct cell {
    double weight, mode, scale, unused;
};

struct proposal {
    size_t dims, nodes[SHAPES_MAX];
    double low[SHAPES_MAX], step[SHAPES_MAX], inverse_step[SHAPES_MAX];
    double high[SHAPES_MAX]; /* the last node */
    bool folds_low[SHAPES_MAX],
        folds_high[SHAPES_MAX]; /* the first or last node stands on an end of the support, where its
                                   tent is folded back */
    struct cell
        cell[CELLS_MAX];  /* [(i1 + 1) * (nodes[1] + 2) + i2 + 1]; one column where dims < 2 */
    double density_scale; /* grid density = interpolated weight * density_scale */
    double node[SHAPES_MAX][NODES_MAX]; /* coordinates of the nodes */
    double cumulative[NODES_MAX];       /* of picking probabilities, last = 1 */
    unsigned char guide[GUIDE];         /* first node whose cumulative exceeds g / GUIDE */
    bool v_from_prior;                  /* fewer than two residual degrees of freedom */
    bool heavy_tails; /* t(24) for the level means: a binary level without events or with only
                         events, or a linear prior that is not normal */
    double mode[SHAPES_MAX], mode_v; /* best node */
    size_t best;
    double *pseudo_y, *pseudo_w; /* binary, owned: [node][level] */
};

/* Ranges over which the coordinates are scanned: from the priors' 1e-6 and 1 - 1e-6 quantiles. */
struct coordinate_range {
    double low[SHAPES_MAX], high[SHAPES_MAX];
    double v_low, v_high;
};

struct proposal_work;
struct proposal_work *proposal_work_new(const struct problem *p);
void proposal_work_free(struct proposal_work *w);

void proposal_init(struct proposal *q, const struct problem *p);
void proposal_release(struct proposal *q);
void proposal_build(struct proposal *q, const struct problem *p, const struct coordinate_range *r,
                    struct proposal_work *w);

/* Pseudo-data of a binary endpoint at the points of `pt` (coordinates set): iterated from shrunken
 * empirical logits; y, w [levels][n]; theta and normal are scratch rows. */
void proposal_pseudo(const struct problem *p, struct points *pt, double *y, double *w,
                     double *theta, double *normal, double *beta);

#endif
