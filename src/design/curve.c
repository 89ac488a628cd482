/* SPDX-License-Identifier: GPL-3.0-or-later */
/* curve.c: what every curve can be asked, whichever it is. */
#include "design/curve.h"

#include <string.h>

#include "base/base.h"
#include "base/vecmath.h"

enum { PLACES = 3 }; /* lowest, this one, largest */

const struct curve *curve_find(const char *key)
{
    for (size_t i = 0; curves[i] != NULL; i++)
        if (strcmp(curves[i]->key, key) == 0)
            return curves[i];
    return NULL;
}

size_t curve_columns(const struct curve *c)
{
    size_t columns = 0;

    for (const struct parameter *p = c->parameters; p->name != NULL; p++)
        columns += p->role == ROLE_LINEAR;
    return columns;
}

/* Parts the parameters' values into coefficients and shape numbers. */
static void split_values(const struct curve *c, const double *value, double beta[COLUMNS_MAX],
                         double shape[SHAPES_MAX], double log_shape[SHAPES_MAX])
{
    size_t columns = 0, shapes = 0;

    for (size_t i = 0; c->parameters[i].name != NULL; i++) {
        if (c->parameters[i].role == ROLE_LINEAR) {
            beta[columns++] = value[i];
        } else {
            shape[shapes] = value[i];
            log_shape[shapes++] = vm_log(value[i]);
        }
    }
}

/* Levels are taken one at a time, between the ends on which a curve may lean. */
void curve_mean(const struct curve *c, const struct curve_levels *levels, const double *value,
                double *theta)
{
    double beta[COLUMNS_MAX] = {0}, shape[SHAPES_MAX] = {0}, log_shape[SHAPES_MAX] = {0};
    const double *const shapes[SHAPES_MAX] = {&shape[0], &shape[1]};
    const double *const log_shapes[SHAPES_MAX] = {&log_shape[0], &log_shape[1]};
    const size_t columns = curve_columns(c);
    double place[PLACES], x[(COLUMNS_MAX - 1) * PLACES];
    const struct curve_levels places = {.count = PLACES, .value = place, .shift = levels->shift};

    if (c->kind != CURVE_BASIS)
        BUG("means are asked of a curve without a formula");
    split_values(c, value, beta, shape, log_shape);
    place[0] = levels->value[0];
    place[2] = levels->value[levels->count - 1];
    for (size_t k = 0; k < levels->count; k++) {
        place[1] = levels->value[k];
        c->basis(&places, 1, shapes, log_shapes, x);
        theta[k] = beta[0];
        for (size_t j = 1; j < columns; j++)
            theta[k] += beta[j] * x[(j - 1) * PLACES + 1];
    }
}
