/* SPDX-License-Identifier: GPL-3.0-or-later */
/* curves.h: the one list of curves, and what several of them share. */
#ifndef TERRACE_MODELS_CURVES_H
#define TERRACE_MODELS_CURVES_H

#include <stdbool.h>
#include <stddef.h>

#include "design/curve.h"

/* The one list: NAME stands for the curve_NAME of models/NAME.c. A new curve is a file and a row.
 */
#define CURVE_LIST(ROW) \
    ROW(linear)         \
    ROW(log_linear)     \
    ROW(quadratic)      \
    ROW(emax)           \
    ROW(sigmoid_emax)   \
    ROW(logistic)       \
    ROW(exponential)    \
    ROW(ndlm)           \
    ROW(independent)

#define CURVE_DECLARE(NAME) extern const struct curve curve_##NAME;
CURVE_LIST(CURVE_DECLARE)

/* Rows of a list of parameters. ORDER: 0, or 2 for a parameter that only order 2 has. */
#define COEFFICIENT_OF(ORDER, NAME, HELP)                                                 \
    {                                                                                     \
        .name = NAME, .role = ROLE_LINEAR, .coordinate = COORDINATE_SELF, .order = ORDER, \
        .help = HELP                                                                      \
    }
#define COEFFICIENT(NAME, HELP) COEFFICIENT_OF(0, NAME, HELP)
#define SHAPE(NAME, VARIANCE, COORDINATE, POSITIVE, HELP)                                 \
    {                                                                                     \
        .name = NAME, .variance = VARIANCE, .role = ROLE_SHAPE, .coordinate = COORDINATE, \
        .positive = POSITIVE, .help = HELP                                                \
    }
#define POSITIVE_SHAPE(NAME, HELP) SHAPE(NAME, NULL, COORDINATE_LOG, true, HELP)
#define PARAMETERS_END \
    {                  \
        .name = NULL   \
    }

double lowest_level(const struct curve_levels *levels);
double largest_level(const struct curve_levels *levels);

/* The fault of levels where a curve starts at 0 and saturates. */
const char *saturating_level_fault(const struct curve_levels *levels);
/* Default prior of its ED50: centred on the geometric middle of the positive levels. */
struct prior saturating_ED50(const struct curve_levels *levels);

/* One column that does not depend on shape numbers: row k is x[k] throughout. */
void fill_row(size_t n, double value, double *row);

#endif
