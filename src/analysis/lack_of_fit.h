/* SPDX-License-Identifier: GPL-3.0-or-later */
/* lack_of_fit.h: does the curve suit the level means? A posterior predictive probability.
 *
 * Gelman, Meng & Stern (1996), Posterior predictive assessment of model fitness via realized
 * discrepancies, Statistica Sinica 6:733. Discrepancy given a draw: the sum over levels with
 * outcomes of the squared standardised distance of the level's mean (or number of events) from what
 * the draw expects. p is the probability, over draws and repetitions of the data, of a discrepancy
 * at least as large as that of the data. Small: the curve does not fit.
 */
#ifndef TERRACE_LACK_OF_FIT_H
#define TERRACE_LACK_OF_FIT_H

#include <stddef.h>

#include "base/rng.h"
#include "design/data.h"
#include "design/design.h"
#include "posterior/posterior.h"

/* NaN with fewer than two levels with outcomes. `d`'s model is that of the draws; key.purpose is
 * ignored (a stream of its own, for a binary endpoint only). */
double lack_of_fit_p(const struct design *d, const struct level_data *data,
                     const struct draws *draws, struct rng_key key);

/* Pr(chi-square on df degrees of freedom > x), df >= 1, x >= 0. */
double chi_square_tail(double x, size_t df);

#endif
