/* SPDX-License-Identifier: GPL-3.0-or-later */
/* log_linear.c: a straight line over the logarithm of the shifted level values. */
#include "base/vecmath.h"
#include "models/curves.h"

enum { E0, SLOPE };

static const struct parameter parameters[] = {
    COEFFICIENT("E0", "mean (binary: logit) where level + shift is 1"),
    COEFFICIENT("slope", "change per unit of ln(level + shift)"),
    PARAMETERS_END,
};

static const char *level_fault(const struct curve_levels *levels)
{
    if (lowest_level(levels) + levels->shift > 0.0)
        return NULL;
    return "a value plus shift is 0 or less, where there is no logarithm; every value plus shift "
           "must be above 0";
}

static struct prior default_prior(size_t i, const struct default_scales *s, bool *scaled)
{
    const struct curve_levels *at = s->levels;

    *scaled = true;
    if (i == E0)
        return prior_normal(s->C, s->A);
    return prior_normal(
        0, s->A / vm_log((largest_level(at) + at->shift) / (lowest_level(at) + at->shift)));
}

static void basis(const struct curve_levels *levels, size_t n,
                  const double *const shape[SHAPES_MAX], const double *const log_shape[SHAPES_MAX],
                  double *x)
{
    (void)shape;
    (void)log_shape;
    for (size_t k = 0; k < levels->count; k++)
        fill_row(n, vm_log(levels->value[k] + levels->shift), x + k * n);
}

const struct curve curve_log_linear = {
    .key = "log_linear",
    .formula = "E0 + slope * ln(d + shift)",
    .kind = CURVE_BASIS,
    .parameters = parameters,
    .monotone = true,
    .levels_wanted = 2,
    .level_fault = level_fault,
    .default_prior = default_prior,
    .basis = basis,
};
