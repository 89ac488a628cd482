/* SPDX-License-Identifier: GPL-3.0-or-later */
/* curve.h: the contract of a dose-response (duration-response) curve, and the one list.
 *
 * Level means (continuous) or logits (binary) are theta = X(phi) beta: linear in beta given at
 * most two shape numbers phi. A model file under models/ describes one curve: names, default
 * priors, basis. It is pure: no I/O, no malloc, no state.
 */
#ifndef TERRACE_CURVE_H
#define TERRACE_CURVE_H

#include <stdbool.h>
#include <stddef.h>

#include "design/prior.h"

enum {
    SHAPES_MAX = 2,           /* shape numbers of a curve */
    COLUMNS_MAX = 4,          /* basis columns, a control off the curve included */
    CURVE_PARAMETERS_MAX = 4, /* parameters a curve can have */
    MODEL_PARAMETERS_MAX = 6  /* and `control`, and `sd` */
};

enum curve_kind {
    CURVE_BASIS, /* a basis matrix X(phi) with one column per linear parameter */
    CURVE_WALK,  /* a random walk over the levels; its shape number is the drift sd */
    CURVE_FREE   /* every level on its own */
};

enum parameter_role {
    ROLE_LINEAR,  /* coefficient of a basis column, in the order of the columns; level or step of a
                     walk */
    ROLE_SHAPE,   /* phi */
    ROLE_CONTROL, /* mean of a control off the curve */
    ROLE_RESIDUAL /* residual sd of a continuous endpoint */
};

/* The coordinate in which samplers walk: ln x, or x itself (reflecting at 0 where positive). */
enum coordinate { COORDINATE_LOG, COORDINATE_SELF };

struct parameter {
    const char *name;     /* the interface's name */
    const char *variance; /* the name under which a prior on its square may stand, or NULL */
    enum parameter_role role;
    enum coordinate coordinate;
    bool positive; /* > 0 (drift_sd: >= 0) */
    int order;     /* 0: always there; 2: only with "order": 2 */
    const char *help;
};

/* The levels on the curve, in increasing value. */
struct curve_levels {
    size_t count;
    const double *value;
    double shift; /* log_linear's design constant */
};

/* What default priors are made from (interface, section 2). */
struct default_scales {
    double A, C; /* scale and centre, response scale or logit */
    bool known;  /* false: a continuous design without range; every scaled prior must be given */
    const struct curve_levels *levels;
    double shift;
    int order;
};

struct curve {
    const char *key;
    const char *formula;        /* for people */
    const char *formula_second; /* the same with "order": 2, or NULL */
    enum curve_kind kind;
    const struct parameter *parameters; /* name NULL ends the list */
    bool monotone;                      /* in the level, whatever the parameters */
    size_t levels_wanted;               /* fewer levels: `check` warns */
    /* NULL when the levels suit the curve, else what is wrong and what is allowed. */
    const char *(*level_fault)(const struct curve_levels *levels);
    /* Default prior of parameters[i]. *scaled tells whether it needs A or C. */
    struct prior (*default_prior)(size_t i, const struct default_scales *s, bool *scaled);
    /* CURVE_BASIS only. The basis at n values of phi: x[(column * levels + k) * n + i] for columns
     * 1, 2, ... of the linear parameters; column 0 is the intercept, is 1 and is not written:
     * column c stands at index c - 1. shape[j] is an array of n values of the j-th shape number
     * (natural scale), log_shape[j] their logarithms (valid where the number is positive). */
    void (*basis)(const struct curve_levels *levels, size_t n,
                  const double *const shape[SHAPES_MAX], const double *const log_shape[SHAPES_MAX],
                  double *x);
};

extern const struct curve *const curves[]; /* NULL-terminated; the only list (models/curves.h) */

const struct curve *curve_find(const char *key);
size_t
curve_columns(const struct curve *c); /* linear parameters of a CURVE_BASIS, intercept included */

/* theta at every level of a CURVE_BASIS for given parameter values (in the order of
 * c->parameters): link scale. */
void curve_mean(const struct curve *c, const struct curve_levels *levels, const double *value,
                double *theta);

#endif
