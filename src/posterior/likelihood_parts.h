/* SPDX-License-Identifier: GPL-3.0-or-later */
/* likelihood_parts.h: what the files of the likelihood fit share; of no use elsewhere. */
#ifndef TERRACE_LIKELIHOOD_PARTS_H
#define TERRACE_LIKELIHOOD_PARTS_H

#include <gsl/gsl_matrix.h>
#include <gsl/gsl_vector.h>

#include "posterior/likelihood_fit.h"

enum { MEANS_MAX = COLUMNS_MAX + 1 + SHAPES_MAX }; /* mean parameters, a control among them */

/* The levels with data (continuous: with their means), in design order. */
struct likelihood_data {
    bool binary;
    size_t levels, on_curve;  /* with data; those of them on the curve */
    size_t level[LEVELS_MAX]; /* level of the design */
    int place[LEVELS_MAX];    /* place on the curve, -1: a control off it */
    double n[LEVELS_MAX], y[LEVELS_MAX], events[LEVELS_MAX];
    double base;      /* taken off every y, so that large responses lose no digits */
    double total, ss; /* responses; within-level sum of squares */
    struct curve_levels at;
    double value[LEVELS_MAX];
};

/* One model made ready. Linear parameters: those of the curve in its order, then the control. */
struct likelihood_model {
    const struct design *d;
    const struct model *m;
    struct likelihood_data x;
    size_t linear, shapes;
    const struct prior *linear_prior[COLUMNS_MAX + 1], *shape_prior[SHAPES_MAX];
    const struct parameter *shape[SHAPES_MAX];
    bool has_control;
    bool sd_free;
    double sd_fixed;
};

void likelihood_model_init(struct likelihood_model *q, const struct design *d,
                           const struct model *m, const struct level_data *data);

/* What the base moves in the j-th linear parameter: levels, not slopes. */
double likelihood_shift(const struct likelihood_model *q, size_t j);
/* The value of a fixed linear parameter, less that. */
double likelihood_known(const struct likelihood_model *q, size_t j);

/* Sets the message and takes every number back. */
void likelihood_fails(struct likelihood_fit *f, const char *sentence);
/* The row of a parameter by its name, made if new. */
struct likelihood_row *likelihood_row(struct likelihood_fit *f, const char *name);
/* ln of the normal density's constant parts, and of the binomial coefficients. */
double likelihood_normal(double total, double rss, double variance);
double likelihood_coefficients(const struct likelihood_data *x);

/* Weighted least squares y ~ X b with weights w; b[columns]; false where X has not full rank. */
bool likelihood_solve(const gsl_matrix *X, const double *y, const double *w, double *b);
/* Inverse of a symmetric positive matrix after scaling to a unit diagonal; false where it is
 * singular for all that the arithmetic can tell. */
bool likelihood_invert(gsl_matrix *A);

void likelihood_basis_run(struct likelihood_fit *f, struct likelihood_model *q);
void likelihood_free_run(struct likelihood_fit *f, struct likelihood_model *q);
void likelihood_walk_run(struct likelihood_fit *f, struct likelihood_model *q);

#endif
