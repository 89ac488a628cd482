/* SPDX-License-Identifier: GPL-3.0-or-later */
/* mean_curve.h: the posterior of the mean curve between the levels, for the figure. */
#ifndef TERRACE_MEAN_CURVE_H
#define TERRACE_MEAN_CURVE_H

#include "analysis/analysis.h"

/* 61 points over the levels on the curve, response scale; points = 0 for curves without a formula;
 * `likelihood` is NaN. What *out held is released. */
void mean_curve_fill(struct curve_result *out, const struct plan *p, const struct design *d,
                     const struct draws *draws, int threads);
void mean_curve_release(struct curve_result *c);

#endif
