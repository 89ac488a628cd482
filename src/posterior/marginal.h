/* SPDX-License-Identifier: GPL-3.0-or-later */
/* marginal.h: likelihoods with the linear part integrated out, and exact draws of it.
 *
 * Block functions over n points (n a multiple of 8), row r of an array at r * n; compiled once per
 * instruction set. Gaussian observations y_k with weights w_k (n_k / sd^2, or pseudo-data of a
 * binary endpoint), constants that do not depend on the point left out:
 *   log M = -1/2 [ ln det + sum_k w_k e_k^2 + zhat'zhat ].
 */
#ifndef TERRACE_MARGINAL_H
#define TERRACE_MARGINAL_H

#include <stddef.h>

#include "posterior/problem.h"

/* The observations of a block. Continuous: precision[n] = 1/sd^2 and the problem's n and y.
 * Binary: pseudo-data y[levels][n], w[levels][n], precision NULL. */
struct observations {
    const double *precision;
    const double *y, *w;
};

struct moment_rows {
    double *mean, *sd, *difference_mean, *difference_sd;
    size_t stride;
};

/* The linear part of one kind of curve. */
struct linear_part {
    void (*factor)(const struct problem *p, size_t n, const double *x, const double *shape0,
                   const struct observations *o, double *factor, double *log_m);
    void (*draw)(const struct problem *p, size_t n, const double *x, const double *factor,
                 const double *normal, double *theta, double *beta);
    void (*moments)(const struct problem *p, size_t n, const double *x, const double *factor,
                    const struct moment_rows *out);
};
extern const struct linear_part linear_basis_sse2, linear_basis_avx2, linear_chain_sse2,
    linear_chain_avx2, linear_trend_sse2, linear_trend_avx2;

struct marginal {
    /* factor rows and log M (without the -n ln sd and within-level terms of sd). x: basis rows;
     * shape0: the chain's drift sd (NULL where the curve has no shape). */
    void (*factor)(const struct problem *p, size_t n, const double *x, const double *shape0,
                   const struct observations *o, double *factor, double *log_m);
    /* Exact draw given standard normals: theta[levels][n] (centre added), beta[columns][n] (basis;
     * E0 with the centre; NULL for a chain). */
    void (*draw)(const struct problem *p, size_t n, const double *x, const double *factor,
                 const double *normal, double *theta, double *beta);
    /* Exact moments given the point: theta, and theta - theta_reference (NULL: not wanted). Row
     * stride of the outputs is `stride`. */
    void (*moments)(const struct problem *p, size_t n, const double *x, const double *factor,
                    size_t stride, double *mean, double *sd, double *difference_mean,
                    double *difference_sd);
    /* Binomial log likelihood less the pseudo-data's: out[n]; response[levels][n] = rates. */
    void (*binomial)(const struct problem *p, size_t n, const double *theta,
                     const struct observations *o, double *out, double *response);
    /* One Newton step of the pseudo-data: y, w [levels][n] from theta. */
    void (*pseudo)(const struct problem *p, size_t n, const double *theta, double *y, double *w);
};

extern const struct marginal marginal_sse2, marginal_avx2;
const struct marginal *marginal_in_force(void);

#endif
