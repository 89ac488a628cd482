/* SPDX-License-Identifier: GPL-3.0-or-later */
/* special.h: gamma and Student t distributions in our own arithmetic (the same bits everywhere).
 *
 * Both tails keep their relative digits. Shapes and degrees of freedom from 0.001 to 1e6, tails
 * down to 1e-200. Relative accuracy (measured against R 4 and GSL): 1e-12, Student t of many
 * degrees of freedom 4e-11; the tail of a quantile 1e-10, beyond a shape of 1e5 5e-10.
 */
#ifndef TERRACE_SPECIAL_H
#define TERRACE_SPECIAL_H

#include <stdbool.h>

/* ln Gamma(x), x > 0 (Abramowitz & Stegun 6.1.40 after shifting up). Check value: ln Gamma(0.5) =
 * 0.572364942924700. */
double special_log_gamma(double x);
/* log(1 + x) - x without cancellation, x > -1. */
double special_log1p_less(double x);

/* Lower or upper tail of the gamma distribution with rate 1 at x >= 0, and the x of a tail
 * probability 0 < p < 1 (0 where it underflows). Abramowitz & Stegun 6.5.29, 6.5.31. */
double special_gamma_tail(double shape, double x, bool upper);
double special_gamma_quantile(double shape, double p, bool upper);

/* Lower or upper tail of Student's t at t, and the t of a tail probability 0 < p < 1. Abramowitz &
 * Stegun 26.5.8, 26.7.1. */
double special_t_tail(double df, double t, bool upper);
double special_t_quantile(double df, double p, bool upper);

/* ln of the density of t. */
double special_t_log_density_top(double df);

/* erf(x / sqrt 2) = Pr(|Z| < x) of a standard normal, x >= 0, with its digits near 0. */
double special_normal_within(double x);

#endif
