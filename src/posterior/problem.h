/* SPDX-License-Identifier: GPL-3.0-or-later */
/* problem.h: one fit as the samplers see it: a plan (model and levels) with its data.
 *
 * theta_k = centre + X(phi) beta (basis) or a chain of levels (walk, free). beta_j = mean_j +
 * scale_j z_j with z ~ N(0, I), so that a fixed coefficient is scale 0. Responses are centred on
 * their weighted mean so that large responses lose no digits.
 *
 * A control off the curve is a level of its own with its own normal prior. A coefficient whose
 * prior is not normal has a stand-in of equal mean and variance here; `weighed` problems draw the
 * level means with each proposal and weigh them by the exact prior (density_correction).
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
    bool second_order;      /* a chain whose steps walk */
    const size_t *order;    /* [levels] position -> level: those on the curve, then the control */
    int control;            /* a level off the curve, or -1 */
    double control_mean, control_scale;
    size_t shapes; /* shape numbers of the curve */
    size_t dims;   /* those that are not fixed: coordinates of the sampler */
    size_t dim_shape[SHAPES_MAX];
    bool reflect[SHAPES_MAX];                           /* by dim: the coordinate reflects at 0 */
    double edge_low[SHAPES_MAX], edge_high[SHAPES_MAX]; /* by dim: ends of the prior's support */
    bool heavy[SHAPES_MAX];                      /* by dim: the prior's tails dwarf its middle */
    double prior_share;                          /* of the proposals that come from the prior */
    enum coordinate coordinate[SHAPES_MAX];      /* by shape */
    const struct prior *shape_prior[SHAPES_MAX]; /* by shape */
    bool sd_free; /* continuous and sd not fixed: coordinate v = ln sd */
    double sd_fixed;
    double v_edge_low, v_edge_high; /* ends of the support of v */
    const struct prior *sd_prior;
    size_t slopes;                                /* basis columns without the intercept */
    double mean[COLUMNS_MAX], scale[COLUMNS_MAX]; /* of beta; [0]: intercept, or the chain's start;
                                                     [1]: second order's first step */
    bool weighed;                                 /* some linear prior is not normal */
    bool cliffs; /* some of those have an end where the density jumps */
    const struct prior *exact[COLUMNS_MAX + 1]; /* those priors by coefficient, last the control's;
                                                   NULL: normal or fixed */
    double stand_in_mean[COLUMNS_MAX + 1], stand_in_sd[COLUMNS_MAX + 1];
    /* chain, by position: 1 where it follows the one before, 0 where it starts anew; factor of
     * drift_sd^2 in the step to it */
    const double *carry, *gap;
    int reference; /* level, or -1 */
    /* from the data */
    double centre;
    const double *n, *events; /* [levels] */
    const double *y;          /* [levels] mean - centre, 0 where n is 0 */
    double n_total, ss_within;
    double n_curve;     /* of the levels on the curve */
    double residual_df; /* n_total - non-empty levels (or mean parameters if fewer) */
};

/* Rows of a factor (one value a point each). Basis: W, rbar, xbar[slopes], zhat[slopes],
 * lower Cholesky factor of H by rows [slopes (slopes + 1) / 2], mean and variance of a control off
 * the curve. Chain, by position: filtered mean [levels], filtered variance [levels], step variance;
 * second order: and filtered step, its covariance with the level, its variance [levels] each. */
size_t problem_factor_rows(const struct problem *p);
/* Rows of basis values: slopes x levels on the curve (0 for a chain). */
size_t problem_basis_rows(const struct problem *p);
/* Standard normals that one draw of the level means takes: columns (and a control off the curve),
 * or levels of a chain. */
size_t problem_normal_rows(const struct problem *p);

/* Whether the level means are drawn with the proposal and weighed: binary, or a linear prior that
 * is not normal. Else they are integrated out and drawn exactly afterwards. */
bool problem_draws_first(const struct problem *p);
/* Quantiles of a prior kept within numbers that can be squared; the second of the logarithm. */
#define PROBLEM_LARGEST 1e100
double problem_quantile(const struct prior *p, double u);
double problem_log_quantile(const struct prior *p, double u);

/* The coordinate of dim d at a probability of its prior. */
double problem_coordinate(const struct problem *p, size_t dim, double u);

#endif
