/* SPDX-License-Identifier: GPL-3.0-or-later */
/* fields_prior.h: the rows of the field table that are read off the lists of curves and priors. */
#ifndef TERRACE_FIELDS_PRIOR_H
#define TERRACE_FIELDS_PRIOR_H

#include "design/curve.h"
#include "design/fields.h"

/* The parameters that belong to no curve. */
extern const struct parameter parameter_control, parameter_sd;

/* The i-th parameter of all curves, each name once, then `control` and `sd`; NULL behind the last.
 */
const struct parameter *parameter_any(size_t i);

const char *curve_word(const struct vocabulary *v, size_t i);

/* Rows: a prior for every name a prior may stand under; a number for every curve parameter. */
bool prior_rows(const struct vocabulary *v, const void *data, size_t i, struct field *out);
bool parameter_rows(const struct vocabulary *v, const void *data, size_t i, struct field *out);

#endif
