/* SPDX-License-Identifier: GPL-3.0-or-later */
/* quadratic.c: a parabola over the level values as shares of the largest. */
#include "models/curves.h"

enum { E0, B1, B2 };

static const struct parameter parameters[] = {
    COEFFICIENT("E0", "mean (binary: logit) at level 0"),
    COEFFICIENT("b1", "coefficient of u, the level as a share of the largest"),
    COEFFICIENT("b2", "coefficient of u squared"),
    PARAMETERS_END,
};

static const char *level_fault(const struct curve_levels *levels)
{
    return largest_level(levels) > 0.0 ? NULL
                                       : "no value is above 0; the largest must be, as the others "
                                         "are taken as shares of it";
}

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    *scaled = true;
    return prior_normal(i == E0 ? s->C : 0, s->A);
}

static void basis(const struct curve_levels *levels, size_t n,
                  const double *const shape[SHAPES_MAX], const double *const log_shape[SHAPES_MAX],
                  double *x)
{
    (void)shape;
    (void)log_shape;
    for (size_t k = 0; k < levels->count; k++) {
        const double u = levels->value[k] / largest_level(levels);

        fill_row(n, u, x + ((B1 - 1) * levels->count + k) * n);
        fill_row(n, u * u, x + ((B2 - 1) * levels->count + k) * n);
    }
}

const struct curve curve_quadratic = {
    .key = "quadratic",
    .formula = "E0 + b1 * u + b2 * u^2, u = d / largest level",
    .kind = CURVE_BASIS,
    .parameters = parameters,
    .levels_wanted = 2,
    .level_fault = level_fault,
    .default_prior = default_prior,
    .basis = basis,
};
