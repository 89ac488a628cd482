/* SPDX-License-Identifier: GPL-3.0-or-later */
/* linear.c: a straight line over the level values. */
#include "models/curves.h"

enum { E0, SLOPE };

static const struct parameter parameters[] = {
    COEFFICIENT("E0", "mean (binary: logit) at level 0; of curve logistic: far below ED50"),
    COEFFICIENT("slope", "change per unit of the level (log_linear: of its logarithm; ndlm of "
                         "order 2: the first step)"),
    PARAMETERS_END,
};

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    *scaled = true;
    if (i == E0)
        return prior_normal(s->C, s->A);
    return prior_normal(0, s->A / (largest_level(s->levels) - lowest_level(s->levels)));
}

static void basis(const struct curve_levels *levels, size_t n,
                  const double *const shape[SHAPES_MAX], const double *const log_shape[SHAPES_MAX],
                  double *x)
{
    (void)shape;
    (void)log_shape;
    for (size_t k = 0; k < levels->count; k++)
        fill_row(n, levels->value[k], x + k * n);
}

const struct curve curve_linear = {
    .key = "linear",
    .formula = "E0 + slope * d",
    .kind = CURVE_BASIS,
    .parameters = parameters,
    .monotone = true,
    .levels_wanted = 2,
    .default_prior = default_prior,
    .basis = basis,
};
