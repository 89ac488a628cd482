/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_search.h: the profile likelihood of a curve with a basis, and its highest place. */
#ifndef TERRACE_LIKELIHOOD_SEARCH_H
#define TERRACE_LIKELIHOOD_SEARCH_H

#include "posterior/likelihood_parts.h"

struct search {
    struct likelihood_model *q;
    size_t dims, shape_of[SHAPES_MAX]; /* free shape numbers */
    double low[SHAPES_MAX], high[SHAPES_MAX];
    double shape[SHAPES_MAX]; /* all of them, natural scale */
    double linear[COLUMNS_MAX + 1];
    bool rough;                          /* fewer digits will do: the scan */
    size_t free[COLUMNS_MAX + 1], frees; /* linear parameters that are estimated */
};

void search_init(struct search *s, struct likelihood_model *q);
/* Whether a free shape number is walked in its logarithm. */
bool search_is_log(const struct search *s, size_t dim);

/* Columns of all linear parameters at shape numbers: x[level with data][parameter]. */
void search_columns(const struct likelihood_model *q, const double *shape, gsl_matrix *x);
/* theta of each level with data, from s->linear. */
void search_theta(const struct search *s, const gsl_matrix *x, double *theta);
/* Working values and weights of a binary endpoint at theta (iterated weighted least squares). */
void search_working(const struct likelihood_data *x, const double *theta, double *z, double *w);
double search_rate(double theta);

/* What is climbed: the log likelihood without its binomial coefficients, or minus the residual sum
 * of squares between levels. The profile solves the linear part first; the value is at s as it is.
 */
double search_profile(struct search *s);
double search_value(const struct search *s);
/* Leaves shape numbers and linear part at the best found from all starts. */
void search_climb(struct search *s);
/* The best profile with a shape number at an end of its range, and which. s stays as it is. */
double search_best_end(const struct search *s, size_t *dim, bool *high);
/* From there to every digit; true where the last full step was as good as none. */
bool search_polish(struct search *s);

/* Derivatives of theta in the free parameters, linear ones first, then shapes: J[level][parameter];
 * and theta. */
void search_jacobian(const struct search *s, gsl_matrix *J, double *theta);
/* Residuals and weights at theta: continuous y - theta and n, binary the working ones. */
void search_residuals(const struct search *s, const double *theta, double *r, double *w);

#endif
