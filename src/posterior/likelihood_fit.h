/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_fit.h: maximum likelihood beside the posterior: estimates, standard errors, AIC.
 *
 * Profile likelihood (the linear part solved exactly) by NLopt from several deterministic starts,
 * polished by Newton steps. Never feeds a draw, a decision or `trusted`; numbers are written with 9
 * significant digits. A prior `fixed` fixes its parameter here too; no other prior is looked at.
 */
#ifndef TERRACE_LIKELIHOOD_FIT_H
#define TERRACE_LIKELIHOOD_FIT_H

#include <stdbool.h>
#include <stddef.h>

#include "design/data.h"
#include "design/design.h"

enum { LIKELIHOOD_ROWS = MODEL_PARAMETERS_MAX + 2 };

struct likelihood_row {
    const char *name; /* borrowed: a parameter of the model; walks: also drift_variance, variance */
    double estimate;  /* NaN: does not exist */
    double se;        /* NaN: fixed, or does not exist */
};

struct likelihood_fit {
    bool exists;           /* false: null in results (a binary walk) */
    bool converged;        /* false: message says why in plain words, and no number stands */
    char *message;         /* owned, or NULL */
    double log_likelihood; /* full normal density at the maximum (variance RSS / n), or the
                              binomial with its coefficient; NaN where it does not exist */
    double aic;            /* counts sd and every estimated parameter */
    size_t rows;
    struct likelihood_row row[LIKELIHOOD_ROWS]; /* in the order of the model's parameters */
    double response[LEVELS_MAX]; /* fitted mean or rate by level of the design; NaN: none */
};

/* Standard errors are from the expected (Gauss-Newton) information; a continuous endpoint's
 * residual variance is on n - p degrees of freedom (n: responses), or known where sd is fixed; sd's
 * own standard error is sd / sqrt(2 (n - p)). A shape number counts as not determined where the
 * likelihood does not fall towards an end of a wide range, or its standard error is ten times its
 * size. */
void likelihood_fit_run(struct likelihood_fit *out, const struct design *d, const struct model *m,
                        const struct level_data *data);
void likelihood_fit_release(struct likelihood_fit *f);

/* CURVE_BASIS only: fitted mean or rate at level value x. False (nothing written) where the fit or
 * a formula between levels does not exist. */
bool likelihood_fit_at(const struct likelihood_fit *f, const struct design *d,
                       const struct model *m, double x, double *response);

#endif
