/* SPDX-License-Identifier: GPL-3.0-or-later */
/* parameter_tables.h: the parameters of a model: likelihood estimates beside the posterior and the
 * prior, and the checks of the draws. */
#ifndef TERRACE_PARAMETER_TABLES_H
#define TERRACE_PARAMETER_TABLES_H

#include "analysis/analysis.h"
#include "report/table.h"

enum parameter_part {
    PARAMETER_VALUES = 1, /* estimate, se, posterior mean, sd, 50%, 95%, prior */
    PARAMETER_DRAWS = 2   /* R-hat, effective numbers of draws, Monte Carlo error */
};

/* One row a parameter (a->model must be set); the likelihood's columns, and its rows that are no
 * parameters of the model (variances of a walk), only where that fit exists. Parameters whose
 * posterior sd is above 0.9 of their prior sd are marked "set by the prior". `parts` is a sum of
 * enum parameter_part. Owned by the caller. */
struct table *table_parameters(const struct analysis *a, unsigned parts);

#endif
