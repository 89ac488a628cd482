/* SPDX-License-Identifier: GPL-3.0-or-later */
/* problem.h: one fit as the samplers see it: a plan (model and levels) with its data.
 *
 * theta_k = centre + X(phi) beta (basis) or a chain of levels (walk, free). beta_j = mean_j +
 * scale_j z_j with z ~ N(0, I), so that a fixed coefficient is scale 0. Responses are centred on
 * their weighted mean so that large responses lose no digits.
 */
#ifndef TERRACE_PROBLEM_H
#define TERRACE_PROBLEM_H

#include <stdbool.h>
#include <stddef.h>

#include "design/curve.h"
#include "design/design.h"
#include "design/prior.h"

struct marginal;
struct sampler_kernel;
struct vecmath;

struct problem {
    /* the copies of the kernels in force (asking the CPU once a plan, not once a block) */
    const struct vecmath *math;
    const struct marginal *marginal;
    const struct sampler_kernel *kernel;
    /* from the plan */
    size_t levels;
    bool binary;
    const struct curve *curve;
    struct curve_levels at; /* the levels on the curve */
    bool chain;             /* walk or free: levels chained; else a basis */
    size_t shapes;          /* shape numbers of the curve */
    size_t dims;            /* those that are not fixed: coordinates of the sampler */
    size_t dim_shape[SHAPES_MAX];
    bool reflect[SHAPES_MAX];                    /* by dim: the coordinate reflects at 0 */
    enum coordinate coordinate[SHAPES_MAX];      /* by shape */
    const struct prior *shape_prior[SHAPES_MAX]; /* by shape */
    bool sd_free; /* continuous and sd not fixed: coordinate v = ln sd */
    double sd_fixed;
    const struct prior *sd_prior;
    size_t slopes; /* basis columns without the intercept */
    double mean[COLUMNS_MAX],
        scale[COLUMNS_MAX]; /* of beta; [0]: intercept, or the chain's start */
    const double *carry;    /* chain: 1 where level k follows level k - 1, 0 where it starts anew */
    const double *gap;      /* chain: multiplies drift_sd^2 in the step to level k */
    int reference;          /* level, or -1 */
    /* from the data */
    double centre;
    const double *n, *events; /* [levels] */
    const double *y;          /* [levels] mean - centre, 0 where n is 0 */
    double n_total, ss_within;
    double residual_df; /* n_total - non-empty levels (or mean parameters if fewer) */
};

/* Rows of a factor (one value a point each). Basis: W, rbar, xbar[slopes], zhat[slopes],
 * lower Cholesky factor of H by rows [slopes (slopes + 1) / 2]. Chain: filtered mean [levels],
 * filtered variance [levels], step variance. */
size_t problem_factor_rows(const struct problem *p);
/* Rows of basis values: slopes x levels (0 for a chain). */
size_t problem_basis_rows(const struct problem *p);
/* Standard normals that one draw of the level means takes: columns, or levels of a chain. */
size_t problem_normal_rows(const struct problem *p);

#endif
