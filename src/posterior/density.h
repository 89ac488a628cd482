/* SPDX-License-Identifier: GPL-3.0-or-later */
/* density.h: the collapsed posterior density at a block of points, in the samplers' coordinates.
 *
 * The one place where priors, Jacobians, basis and marginal likelihood meet: the proposal, the
 * sampler, the slice sampler and the quadrature all ask here.
 *
 * Coordinates: one a free shape number (its logarithm, or itself; where it reflects, |c| counts),
 * then v = ln sd where sd is free.
 */
#ifndef TERRACE_DENSITY_H
#define TERRACE_DENSITY_H

#include "posterior/marginal.h"
#include "posterior/problem.h"

/* A block of up to `capacity` points and all that is computed for them; arrays of rows of n. */
struct points {
    size_t capacity, n;        /* n: a multiple of 8 */
    double *coord[SHAPES_MAX]; /* in: by dim */
    double *v;                 /* in: where sd is free */
    const double *y, *w;       /* in: pseudo-data (binary), rows of n; borrowed */
    double *shape[SHAPES_MAX], *log_shape[SHAPES_MAX]; /* by shape, natural scale */
    double *sd, *precision;
    bool same_shapes;        /* in: only v has changed since the last call */
    double *log_prior_shape; /* the shape coordinates' part of log_prior */
    double *log_prior;       /* of all coordinates, Jacobians included */
    double *x, *factor;
    double *log_m; /* collapsed log likelihood (binary: of the pseudo-data) */
    double *scratch;
};

void points_init(struct points *pt, const struct problem *p, size_t capacity);
void points_release(struct points *pt);

/* Natural values and log_prior from the coordinates. */
void density_prior(const struct problem *p, struct points *pt);
/* Linear coefficients whose prior is not normal: sum[n] += log of prior : its normal stand-in, at
 * level means theta[levels][n] and coefficients beta[columns][n] (basis). At most 64 points. */
void density_correction(const struct problem *p, size_t n, const double *theta, const double *beta,
                        double *sum);
/* log_prior, then basis, factor and log_m (all terms that depend on the point). */
void density_at(const struct problem *p, struct points *pt);

#endif
