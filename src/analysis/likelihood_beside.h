/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_beside.h: the likelihood fit beside the posterior of the same model and data, for
 * reports. It decides nothing. */
#ifndef TERRACE_LIKELIHOOD_BESIDE_H
#define TERRACE_LIKELIHOOD_BESIDE_H

#include "analysis/analysis.h"

/* Fills out->likelihood (what it held is released) and, at the values of out->curve, the curve that
 * goes with it. */
void likelihood_beside(struct analysis *out, const struct design *d, const struct level_data *data);

#endif
