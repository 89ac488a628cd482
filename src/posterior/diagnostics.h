/* SPDX-License-Identifier: GPL-3.0-or-later */
/* diagnostics.h: effective sample sizes, R-hat and Monte Carlo standard errors of draws.
 *
 * Vehtari, Gelman, Simpson, Carpenter & Buerkner (2021), Rank-normalization, folding, and
 * localization: an improved R-hat for assessing convergence of MCMC, Bayesian Analysis 16:667.
 * x has n values, chain of x[i] is i % chains. chains = 1 means independent draws: ESS = n.
 * A constant array has ESS = n and no R-hat (NaN). Thread-safe.
 */
#ifndef TERRACE_DIAGNOSTICS_H
#define TERRACE_DIAGNOSTICS_H

#include <stddef.h>

double diag_ess(const double *x, size_t n, size_t chains); /* of the mean, no ranks; split chains */
double diag_ess_bulk(const double *x, size_t n, size_t chains); /* rank-normalised */
double diag_ess_tail(const double *x, size_t n, size_t chains); /* min over 5% and 95% quantile */
double diag_rhat(const double *x, size_t n, size_t chains);     /* max of bulk and folded, ranks */

/* Mean of x in index order (pieces of fixed size: the same bytes everywhere), and the sd
 * with n - 1. */
double diag_mean(const double *x, size_t n);
double diag_sd(const double *x, size_t n, double mean);
/* sd / sqrt(ESS) */
double diag_mcse_mean(const double *x, size_t n, size_t chains);

/* Monte Carlo standard error of a probability p estimated with `ess` effective draws: sqrt(q(1 -
 * q)/(ess + 2)), q = (p ess + 1)/(ess + 2), so that 0 and 1 are never exact. */
double diag_mcse_probability(double p, double ess);

/* Quantiles (type 7 of Hyndman & Fan 1996, The American Statistician 50:361) at probability
 * q[0..m-1]; x is copied. */
void diag_quantiles(const double *x, size_t n, size_t m, const double *q, double *out);

#endif
