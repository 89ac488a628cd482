/* SPDX-License-Identifier: GPL-3.0-or-later */
/* sensitivity.h: the design's sensitivity models, fitted to the same data by the same code. They
 * decide nothing and change nothing of the analysis they stand beside.
 */
#ifndef TERRACE_SENSITIVITY_H
#define TERRACE_SENSITIVITY_H

#include "analysis/analysis.h"

/* Fills out->sensitivity, one a model of d->sensitivity (what it held is released). A model that
 * cannot be fitted has `failure` and no numbers; that is no error. */
void sensitivity_run(struct analysis *out, const struct design *d, const struct level_data *data,
                     const struct analysis_request *r);
void sensitivity_release(struct analysis *a);

#endif
